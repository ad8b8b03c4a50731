package server

import (
	"context"
	"encoding/json"
	"fmt"
	"net/http"
	"time"

	"github.com/google/uuid"
	"github.com/gorilla/websocket"
	"github.com/labstack/echo/v4"

	"wakeback/drift/nav"
	"wakeback/search/incident"
	"wakeback/server/gate"
	"wakeback/server/hub"
)

func (s *Server) newUpgrader() *websocket.Upgrader {
	return &websocket.Upgrader{
		HandshakeTimeout: 5 * time.Second,
		ReadBufferSize:   2 << 10,
		WriteBufferSize:  4 << 10,
		WriteBufferPool:  &s.writeBuffers,
		// The middleware has checked Origin already, for this as for all routes.
		CheckOrigin: func(*http.Request) bool { return true },
		Error: func(w http.ResponseWriter, r *http.Request, status int, reason error) {
			p := pMalformed.because(reason, "Expected a websocket handshake (RFC 6455).")
			p.Status = status
			text, _ := json.Marshal(p.Problem) // plain fields
			w.Header().Set("Content-Type", "application/problem+json")
			w.WriteHeader(status)
			_, _ = w.Write(text)
		},
	}
}

// getStream is GET /stream.
func (s *Server) getStream(c echo.Context) error {
	after, err := queryNumber(c, "after", 0, 1<<63-1)
	if err != nil {
		return err
	}
	epoch := c.QueryParam("epoch")
	if len(epoch) > 100 {
		return fieldError("epoch", "the epoch of a hello, up to 100 letters", nil)
	}
	conn, err := s.upgrader.Upgrade(c.Response(), c.Request(), nil)
	if err != nil {
		return nil // the upgrader has answered
	}
	id := who(c)
	if !id.Paired { // all come from this machine: each stream counts as a device
		id.Device = incident.DeviceID("open-" + uuid.NewString())
	}
	info := hub.Info{Device: id.Device, Name: id.Name, Role: id.Role.String(), Remote: c.RealIP()}
	req := hub.Request{After: incident.Seq(after), Epoch: epoch}
	if err := s.hub.Serve(s.streams, conn, info, req); err != nil {
		s.log.Info("stream refused", "name", id.Name, "remote", info.Remote, "error", err)
	}
	return nil
}

// Message takes what a client says on its stream.
func (s *Server) Message(_ context.Context, c *hub.Client, kind string, raw []byte) {
	var err error
	switch kind {
	case "event":
		err = s.streamEvents(c, raw)
	case "fix":
		err = s.streamFix(c, raw)
	default:
		err = fieldError("t", `"time", "fix" or "event"`, nil)
	}
	if err != nil {
		c.Send(streamProblem(err))
	}
}

func streamProblem(err error) hub.Problem {
	p := problemOf(err)
	return hub.Problem{
		T: "problem", Code: p.Type[len(problemBase):], Title: p.Title, Detail: p.Detail, Field: p.Field,
	}
}

// ackMessage says which events are on disk now.
type ackMessage struct {
	T    string             `json:"t"`
	IDs  []incident.EventID `json:"ids"`
	Seqs []incident.Seq     `json:"seqs"`
}

// streamEvents takes one event ("event") or several ("events"), of one
// incident each or of several, all or nothing.
func (s *Server) streamEvents(c *hub.Client, raw []byte) error {
	o, err := readObject(raw)
	if err != nil {
		return err
	}
	var list []json.RawMessage
	r := &reader{o: o}
	if !take(r, "events", "a list of events", &list) {
		var one json.RawMessage
		need(r, "event", "an event of the log", &one)
		list = []json.RawMessage{one}
	}
	if r.err != nil {
		return r.err
	}
	if len(list) == 0 || len(list) > maxBatch {
		return fieldError("events", fmt.Sprintf("a list of 1 to %d events", maxBatch), nil)
	}
	events, err := readEvents(list)
	if err != nil {
		return err
	}
	from, err := s.speaker(c.Info())
	if err != nil {
		return err
	}
	answer, err := s.takeEvents(from, events)
	if err != nil {
		p := streamProblem(err)
		for _, e := range events {
			p.Of = append(p.Of, e.ID)
		}
		c.Send(p)
		return nil
	}
	ack := ackMessage{T: "ack"}
	for _, k := range answer.Events {
		ack.IDs, ack.Seqs = append(ack.IDs, k.ID), append(ack.Seqs, k.Seq)
	}
	c.Send(ack)
	return nil
}

// speaker is who a client of the stream is now: its role may have changed
// since it connected.
func (s *Server) speaker(info hub.Info) (identity, error) {
	d, err := s.gate.Device(info.Device)
	switch {
	case err == nil:
		return identity{Device: d.ID, Name: d.Name, Role: d.Role, Paired: true}, nil
	case s.gate.Open():
		return identity{Device: info.Device, Name: info.Name, Role: gate.Skipper}, nil
	}
	return identity{}, gate.ErrUnpaired
}

// streamFix takes where a phone is.
func (s *Server) streamFix(c *hub.Client, raw []byte) error {
	o, err := readObject(raw)
	if err != nil {
		return err
	}
	f := phoneFix{Device: c.Info().Device, Name: c.Info().Name}
	r := &reader{o: o}
	need(r, "at", wantTime, &f.At)
	need(r, "position", `{"lat": -90 to 90, "lon": -180 to 180} in degrees`, &f.Position)
	f.ErrorM = takeNumber(r, "error_m", 0, 1e6, "metres")
	f.SogKn = takeNumber(r, "sog_kn", 0, 300, "knots")
	if cog, ok := takeNumber(r, "cog_deg", 0, 360, "degrees true").Get(); ok {
		f.CogDeg = nav.Some(nav.True(cog))
	}
	if r.err != nil {
		return r.err
	}
	from, err := s.speaker(c.Info())
	if err != nil {
		return err
	}
	s.phones.put(f, from.Paired)
	return nil
}

func takeNumber(r *reader, name string, low, high float64, unit string) nav.Opt[float64] {
	want := fmt.Sprintf("%v to %v %s", low, high, unit)
	var v float64
	if !take(r, name, want, &v) {
		return nav.None[float64]()
	}
	if v < low || v > high {
		r.err = fieldError(name, want, nil)
		return nav.None[float64]()
	}
	return nav.Some(v)
}
