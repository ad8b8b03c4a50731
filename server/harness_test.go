package server

import (
	"bytes"
	"context"
	"encoding/json"
	"io"
	"net/http"
	"net/http/httptest"
	"strings"
	"sync"
	"testing"
	"time"

	"github.com/google/uuid"
	"github.com/gorilla/websocket"

	"wakeback/drift/nav"
	"wakeback/search/incident"
	"wakeback/server/feed"
)

// start is when the tests begin on their own clock.
var start = time.Date(2026, 6, 1, 2, 14, 7, 0, time.UTC)

// clock is a clock that a test sets.
type clock struct {
	mu sync.Mutex // guards t
	t  time.Time
}

func (c *clock) now() time.Time {
	c.mu.Lock()
	defer c.mu.Unlock()
	return c.t
}

func (c *clock) add(d time.Duration) {
	c.mu.Lock()
	defer c.mu.Unlock()
	c.t = c.t.Add(d)
}

// bridge is a vessel whose instruments say what a test wants.
type bridge struct {
	mu      sync.Mutex // guards vessel
	vessel  func(now time.Time) feed.Vessel
	updates chan feed.Update
}

func newBridge() *bridge { return &bridge{updates: make(chan feed.Update, 8)} }

func (b *bridge) Vessel(now time.Time) feed.Vessel {
	b.mu.Lock()
	defer b.mu.Unlock()
	if b.vessel == nil {
		return feed.Vessel{At: now}
	}
	return b.vessel(now)
}

func (b *bridge) Updates() <-chan feed.Update { return b.updates }

func (b *bridge) set(v func(now time.Time) feed.Vessel) {
	b.mu.Lock()
	defer b.mu.Unlock()
	b.vessel = v
}

// sailing is a vessel on a straight course with a fresh fix at every moment.
func sailing(from nav.Position, since time.Time, cog nav.TrueDeg, sogKn float64) func(time.Time) feed.Vessel {
	return func(now time.Time) feed.Vessel {
		p, _ := nav.Direct(from, cog, sogKn*nav.MsPerKn*now.Sub(since).Seconds())
		return feed.Vessel{
			At:          now,
			Position:    nav.Some(feed.Reading[nav.Position]{Value: p, At: now}),
			SogKn:       nav.Some(feed.Reading[float64]{Value: sogKn, At: now}),
			CogTrue:     nav.Some(feed.Reading[nav.TrueDeg]{Value: cog, At: now}),
			HeadingTrue: nav.Some(feed.Reading[nav.TrueDeg]{Value: cog, At: now}),
		}
	}
}

// rig is a server on a real socket with its clock and instruments in the
// hands of the test. Its live loop turns only when the test says so.
type rig struct {
	*Server
	t      testing.TB
	clock  *clock
	bridge *bridge
	http   *httptest.Server
	live   *live
	keeper *keeper
}

// rigOn starts a server on a store. Pairing is open unless change says else.
func rigOn(t testing.TB, st Store, change func(*Config)) *rig {
	t.Helper()
	r := &rig{t: t, clock: &clock{t: start}, bridge: newBridge()}
	cfg := Config{Listen: "127.0.0.1:0", Data: "none", OpenPairing: true, Now: r.clock.now, MaxStreams: 1000}
	if change != nil {
		change(&cfg)
	}
	s, err := newServer(cfg, st, r.bridge, "")
	if err != nil {
		t.Fatal(err)
	}
	r.Server, r.live, r.keeper = s, &live{s: s}, &keeper{s: s}
	r.http = httptest.NewUnstartedServer(s.echo)
	r.http.Config = s.httpServer()
	r.http.Start()
	t.Cleanup(func() {
		ctx, cancel := context.WithTimeout(context.Background(), 5*time.Second)
		defer cancel()
		if err := s.hub.Close(ctx); err != nil {
			t.Error(err)
		}
		r.http.Close()
	})
	return r
}

// do makes a request and reads the answer into out, which may be nil.
func (r *rig) do(method, path string, in any, out any) *http.Response {
	r.t.Helper()
	resp, body := r.raw(method, path, in, nil)
	if out != nil {
		if err := json.Unmarshal(body, out); err != nil {
			r.t.Fatalf("%s %s: %v in %s", method, path, err, body)
		}
	}
	return resp
}

func (r *rig) raw(method, path string, in any, header http.Header) (*http.Response, []byte) {
	r.t.Helper()
	var body io.Reader
	switch in := in.(type) {
	case nil:
	case string:
		body = strings.NewReader(in)
	default:
		text, err := json.Marshal(in)
		if err != nil {
			r.t.Fatal(err)
		}
		body = bytes.NewReader(text)
	}
	req, err := http.NewRequest(method, r.http.URL+path, body)
	if err != nil {
		r.t.Fatal(err)
	}
	if in != nil {
		req.Header.Set("Content-Type", "application/json")
	}
	for k, v := range header {
		req.Header[k] = v
	}
	if h := header.Get("Host"); h != "" {
		req.Host = h
	}
	resp, err := http.DefaultTransport.RoundTrip(req)
	if err != nil {
		r.t.Fatal(err)
	}
	defer resp.Body.Close()
	text, err := io.ReadAll(resp.Body)
	if err != nil {
		r.t.Fatal(err)
	}
	return resp, text
}

// ear is a client of the stream that keeps what it hears.
type ear struct {
	t    testing.TB
	conn *websocket.Conn
}

func (r *rig) listen(query string, header http.Header) *ear {
	r.t.Helper()
	url := "ws" + strings.TrimPrefix(r.http.URL, "http") + "/api/v1/stream" + query
	conn, _, err := websocket.DefaultDialer.Dial(url, header)
	if err != nil {
		r.t.Fatal(err)
	}
	r.t.Cleanup(func() { conn.Close() })
	return &ear{r.t, conn}
}

// wait reads until a message of a kind comes for which ok is true.
func (e *ear) wait(kind string, ok func(m map[string]any) bool) map[string]any {
	e.t.Helper()
	if err := e.conn.SetReadDeadline(time.Now().Add(5 * time.Second)); err != nil {
		e.t.Fatal(err)
	}
	for {
		var m map[string]any
		if err := e.conn.ReadJSON(&m); err != nil {
			e.t.Fatalf("waiting for %s: %v", kind, err)
		}
		if m["t"] == kind && (ok == nil || ok(m)) {
			return m
		}
	}
}

func (e *ear) say(v any) {
	e.t.Helper()
	if err := e.conn.WriteJSON(v); err != nil {
		e.t.Fatal(err)
	}
}

// phone is a device that writes its own chain of events.
type phone struct {
	id   incident.DeviceID
	seq  uint64
	hash string
}

func newPhone() *phone { return &phone{id: incident.DeviceID(uuid.NewString())} }

func newID() string { return uuid.Must(uuid.NewV7()).String() }

// write makes the phone's next event.
func (p *phone) write(t testing.TB, in incident.IncidentID, at time.Time, kind incident.Kind, body any) incident.Event {
	t.Helper()
	e, err := incident.New(incident.Event{
		ID: incident.EventID(newID()), Incident: in, Device: p.id, DeviceSeq: p.seq + 1, PrevHash: p.hash, At: at, DeviceAt: at,
	}, kind, body)
	if err != nil {
		t.Fatal(err)
	}
	p.seq, p.hash = e.DeviceSeq, e.Hash
	return e
}

func batchOf(events ...incident.Event) map[string]any { return map[string]any{"events": events} }

func eventsPath(id incident.IncidentID) string { return api + "/incidents/" + string(id) + "/events" }

// only is the one incident that there is.
func (r *rig) only() incident.State {
	r.t.Helper()
	states := r.book.states()
	if len(states) != 1 {
		r.t.Fatalf("%d incidents, want 1", len(states))
	}
	return states[0]
}

// turn lets the live loop and the keeper look once.
func (r *rig) turn() {
	r.live.last = time.Time{}
	r.live.round(r.clock.now())
	r.keeper.look(r.clock.now())
}
