package server

import (
	"crypto/sha256"
	"encoding/hex"
	"encoding/json"
	"fmt"
	"net/http"
	"slices"
	"time"

	"github.com/google/uuid"
	"github.com/labstack/echo/v4"

	"wakeback/drift/nav"
	"wakeback/search/incident"
)

// markRequest is the body of POST /marks, read and in one form.
type markRequest struct {
	ID          incident.EventID           `json:"id"`
	At          time.Time                  `json:"at"`
	Position    nav.Opt[nav.Position]      `json:"position"`
	ErrorM      nav.Opt[float64]           `json:"error_m"`
	Source      string                     `json:"source"`
	NewIncident bool                       `json:"new_incident"`
	Person      nav.Opt[incident.PersonNo] `json:"person"`
	Side        string                     `json:"side"`
	Drill       bool                       `json:"drill"`
	Test        bool                       `json:"test"`
}

// markedBody is what the server writes for a mark that a script asked for. The
// fingerprint of the request makes a repeat of it known from another request
// with the same id, in the one place that is as durable as the event.
type markedBody struct {
	incident.Marked
	Request string `json:"request"`
}

func readMark(o object) (markRequest, error) {
	r := &reader{o: o}
	m := markRequest{ID: r.eventID("id")}
	need(r, "at", wantTime, &m.At)
	var p nav.Position
	if take(r, "position", `{"lat": -90 to 90, "lon": -180 to 180} in degrees`, &p) {
		m.Position = nav.Some(p)
	}
	var errorM float64
	if take(r, "error_m", "a radius in metres", &errorM) {
		m.ErrorM = nav.Some(errorM)
	}
	take(r, "source", "where the position is from: phone, vessel, typed, or a name", &m.Source)
	take(r, "new_incident", "true or false", &m.NewIncident)
	var no incident.PersonNo
	if take(r, "person", "the number of a person, from 1", &no) {
		m.Person = nav.Some(no)
	}
	take(r, "side", `"port" or "starboard"`, &m.Side)
	take(r, "drill", "true or false", &m.Drill)
	take(r, "test", "true or false", &m.Test)
	if r.err == nil && len(m.Source) > 100 {
		r.err = fieldError("source", "a word of up to 100 bytes", nil)
	}
	m.At = m.At.UTC().Truncate(time.Millisecond)
	return m, r.err
}

// fingerprint is a hash of all that was asked for.
func (m markRequest) fingerprint() (string, error) {
	text, err := json.Marshal(m)
	if err != nil {
		return "", fmt.Errorf("fingerprint of mark %s: %w", m.ID, err)
	}
	sum := sha256.Sum256(text)
	return hex.EncodeToString(sum[:]), nil
}

// The sources that a sender may name for a position. Any other word is no
// reason to refuse a mark: it is kept as the name of who says so.
var askedSources = []incident.PositionSource{
	incident.FromPhone, incident.FromVessel, incident.FromDR, incident.FromTrack, incident.FromTyped, incident.FromBeacon,
}

func (m markRequest) source() incident.PositionSource {
	if s := incident.PositionSource(m.Source); slices.Contains(askedSources, s) {
		return s
	}
	return incident.FromTyped
}

func (m markRequest) by(device string) string {
	if m.Source == "" || slices.Contains(append(askedSources, incident.FromNothing), incident.PositionSource(m.Source)) {
		return device
	}
	return device + " (" + m.Source + ")"
}

// markAnswer is the answer to a mark. All of it follows from the event as it
// was kept, so that a repeat of the request gets the same.
type markAnswer struct {
	Incident incidentLink   `json:"incident"`
	Event    incident.Event `json:"event"`
}

type incidentLink struct {
	ID  incident.IncidentID `json:"id"`
	URL string              `json:"url"`
}

func answerMark(e incident.Event) markAnswer {
	return markAnswer{Incident: incidentLink{ID: e.Incident, URL: incidentURL(e.Incident)}, Event: e}
}

func incidentURL(id incident.IncidentID) string { return "/api/v1/incidents/" + string(id) }

// postMark is POST /marks.
func (s *Server) postMark(c echo.Context) error {
	o, err := readBody(c.Response(), c.Request())
	if err != nil {
		return err
	}
	m, err := readMark(o)
	if err != nil {
		return err
	}
	e, fresh, err := s.mark(m, who(c).Name)
	if err != nil {
		return bodyFieldOutside(err)
	}
	status := http.StatusOK
	if fresh {
		status = http.StatusCreated
		s.nudge()
	}
	c.Response().Header().Set(echo.HeaderLocation, incidentURL(e.Incident))
	return c.JSON(status, answerMark(e))
}

// bodyFieldOutside names the fields of a body as they stand in the request.
func bodyFieldOutside(err error) error {
	if p := problemOf(err); len(p.Field) > 5 && p.Field[:5] == "body." {
		return fieldError(p.Field[5:], p.Expected, err)
	}
	return err
}

// mark keeps a mark, or finds the one that an earlier request of the same
// content made. It reports whether it is new.
func (s *Server) mark(m markRequest, device string) (incident.Event, bool, error) {
	print, err := m.fingerprint()
	if err != nil {
		return incident.Event{}, false, err
	}
	var old incident.Event
	kept, err := s.ledger.write(func(w *writing) error {
		var found bool
		if old, found, err = w.find(m.ID); err != nil {
			return fmt.Errorf("look for mark %s: %w", m.ID, err)
		}
		if found {
			return sameRequest(old, print)
		}
		return s.authorMark(w, m, print, device)
	})
	switch {
	case err != nil:
		return incident.Event{}, false, err
	case len(kept) == 0:
		return old, false, nil
	}
	return kept[0], true, nil
}

func sameRequest(old incident.Event, print string) error {
	var body markedBody
	if old.Kind != incident.KindMarked || json.Unmarshal(old.Body, &body) != nil || body.Request != print {
		return errConflict
	}
	return nil
}

// authorMark writes the event for a mark.
func (s *Server) authorMark(w *writing, m markRequest, print, device string) error {
	body := markedBody{Marked: s.markedAt(m), Request: print}
	draft := incident.Event{ID: m.ID, At: m.At, DeviceAt: m.At, By: m.by(device), Drill: m.Drill, Test: m.Test}
	if ahead := m.At.Sub(s.now()); ahead > time.Second {
		ms := ahead.Milliseconds() // a press cannot lie in the future: the clock was fast by this at least
		draft.ClockErrorMs = &ms
	}
	id, err := s.incidentFor(w, m.NewIncident, m.Drill, m.Test)
	if err != nil {
		return err
	}
	draft.Incident = id
	_, err = w.author(draft, incident.KindMarked, body)
	return err
}

// incidentFor is the incident that a mark of the server's own belongs to: the
// one that is open, or a new one. A test always gets its own.
func (s *Server) incidentFor(w *writing, anew, drill, test bool) (incident.IncidentID, error) {
	if !anew && !test {
		if open, ok := w.openFor(drill); ok {
			return open.ID, nil
		}
	}
	id, err := uuid.NewV7()
	if err != nil {
		return "", fmt.Errorf("name an incident: %w", err)
	}
	return incident.IncidentID(id.String()), nil
}

// markedAt is what is written of the place: as it was given, else where the
// vessel was.
func (s *Server) markedAt(m markRequest) incident.Marked {
	body := incident.Marked{Source: incident.FromNothing}
	if p, ok := m.Position.Get(); ok {
		body = incident.Marked{Position: nav.Some(p), Source: m.source(), ErrorM: m.ErrorM}
	} else if place, ok := s.vessel.placeAt(m.At, s.now()).Get(); ok {
		body = incident.Marked{
			Position: nav.Some(place.position), Source: place.source, ErrorM: place.errorM,
			FixAgeS: place.fixAgeS, SogKn: place.sogKn, CogDeg: place.cog, HeadingDeg: place.heading,
		}
	}
	body.NewIncident, body.Person, body.Side = m.NewIncident, m.Person, m.Side
	return body
}
