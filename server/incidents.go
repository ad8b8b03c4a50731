package server

import (
	"encoding/json"
	"fmt"
	"net/http"
	"slices"
	"strconv"
	"time"

	"github.com/labstack/echo/v4"

	"wakeback/search/incident"
)

const (
	maxBatch    = 100  // events in one request
	defaultPage = 500  // events in one answer
	maxPage     = 1000 // at most
)

// getIncidents is GET /incidents: all of them, newest first.
func (s *Server) getIncidents(c echo.Context) error {
	states := s.book.states()
	if states == nil {
		states = []incident.State{}
	}
	return c.JSON(http.StatusOK, map[string]any{"incidents": states})
}

// getIncident is GET /incidents/ID: what its events add up to.
func (s *Server) getIncident(c echo.Context) error {
	st, err := s.incidentOf(c)
	if err != nil {
		return err
	}
	return c.JSON(http.StatusOK, st)
}

func (s *Server) incidentOf(c echo.Context) (incident.State, error) {
	id := incident.IncidentID(c.Param("id"))
	st, ok := s.book.state(id)
	if !ok {
		return incident.State{}, pNotFound.problem("No incident of that id is in the log.")
	}
	return st, nil
}

// eventsAnswer is one page of the log.
type eventsAnswer struct {
	Events  []incident.Event `json:"events"`
	LastSeq incident.Seq     `json:"last_seq"` // of the last event here; after, when there is none
	More    bool             `json:"more"`
}

// getEvents is GET /incidents/ID/events, with those of the incidents that
// were joined to it.
func (s *Server) getEvents(c echo.Context) error {
	st, err := s.incidentOf(c)
	if err != nil {
		return err
	}
	after, err := queryNumber(c, "after", 0, 1<<63-1)
	if err != nil {
		return err
	}
	limit, err := queryNumber(c, "limit", defaultPage, maxPage)
	if err != nil {
		return err
	}
	answer := eventsAnswer{Events: []incident.Event{}, LastSeq: incident.Seq(after)}
	events := s.book.events(st.ID, incident.Seq(after))
	if answer.More = uint64(len(events)) > limit; answer.More {
		events = events[:limit]
	}
	if len(events) > 0 {
		answer.Events, answer.LastSeq = events, events[len(events)-1].Seq
	}
	return c.JSON(http.StatusOK, answer)
}

// queryNumber reads a whole number of the query, up to a greatest.
func queryNumber(c echo.Context, name string, fallback, most uint64) (uint64, error) {
	text := c.QueryParam(name)
	if text == "" {
		return fallback, nil
	}
	n, err := strconv.ParseUint(text, 10, 64)
	if err != nil || n > most {
		return 0, fieldError(name, fmt.Sprintf("a whole number from 0 to %d", most), err)
	}
	return n, nil
}

// batchAnswer says what became of a batch: every event of it is on disk.
type batchAnswer struct {
	Events  []kept       `json:"events"` // in the order of the request
	LastSeq incident.Seq `json:"last_seq"`
}

// kept is the place in the log of an event.
type kept struct {
	ID  incident.EventID `json:"id"`
	Seq incident.Seq     `json:"seq"`
	// New is false when the event was in the log before.
	New bool `json:"new"`
}

// postEvents is POST /incidents/ID/events: a batch, all or nothing.
func (s *Server) postEvents(c echo.Context) error {
	o, err := readBody(c.Response(), c.Request())
	if err != nil {
		return err
	}
	r := &reader{o: o}
	var raw []json.RawMessage
	need(r, "events", fmt.Sprintf("a list of 1 to %d events", maxBatch), &raw)
	if r.err == nil && (len(raw) == 0 || len(raw) > maxBatch) {
		r.err = fieldError("events", fmt.Sprintf("a list of 1 to %d events", maxBatch), nil)
	}
	if r.err != nil {
		return r.err
	}
	events, err := readEvents(raw)
	if err != nil {
		return err
	}
	id := incident.IncidentID(c.Param("id"))
	for i, e := range events {
		if e.Incident != id {
			return fieldError(fmt.Sprintf("events[%d].incident", i), "the incident of the path, "+string(id), nil)
		}
	}
	answer, err := s.takeEvents(who(c), events)
	if err != nil {
		return err
	}
	return c.JSON(http.StatusOK, answer)
}

// takeEvents keeps events that a device sent, with those that the server adds
// to them, in one commit.
func (s *Server) takeEvents(from identity, events []incident.Event) (batchAnswer, error) {
	if err := s.maySend(from, events); err != nil {
		return batchAnswer{}, err
	}
	if i := twice(events); i >= 0 {
		return batchAnswer{}, &fieldIn{prefix: fmt.Sprintf("events[%d].", i), err: errConflict}
	}
	fresh, err := s.ledger.write(func(w *writing) error {
		if err := w.add(events...); err != nil {
			return err
		}
		return s.follow(w, w.events)
	})
	if err != nil {
		return batchAnswer{}, err
	}
	if len(fresh) > 0 {
		s.nudge()
	}
	return s.batchAnswer(events, fresh)
}

// twice finds an event whose id stands before it in the batch with other content.
func twice(events []incident.Event) int {
	hashes := make(map[incident.EventID]string, len(events))
	for i, e := range events {
		if h, ok := hashes[e.ID]; ok && h != e.Hash {
			return i
		}
		hashes[e.ID] = e.Hash
	}
	return -1
}

func (s *Server) batchAnswer(events, fresh []incident.Event) (batchAnswer, error) {
	seqs := make(map[incident.EventID]incident.Seq, len(fresh))
	for _, e := range fresh {
		seqs[e.ID] = e.Seq
	}
	answer := batchAnswer{Events: make([]kept, len(events))}
	for i, e := range events {
		seq, isNew := seqs[e.ID]
		if !isNew {
			old, ok, err := s.store.Event(e.ID)
			if err != nil || !ok {
				return batchAnswer{}, fmt.Errorf("find event %s that was kept: %w", e.ID, err)
			}
			seq = old.Seq
		}
		answer.Events[i] = kept{ID: e.ID, Seq: seq, New: isNew}
		answer.LastSeq = max(answer.LastSeq, seq)
	}
	return answer, nil
}

// joinWithin is how long before the opening of an incident a mark of another
// may lie and still be of the same fall. Our choice: a phone that was alone
// for an hour may hold a mark of the same event; an older one is shown apart,
// because in the open incident it would come first.
const joinWithin = time.Hour

// follow adds what the server has to say to new events of a device: that an
// incident which a phone opened alone belongs to the one that is open, and
// where a mark without a position was.
func (s *Server) follow(w *writing, events []incident.Event) error {
	for _, e := range slices.Clone(events) {
		if e.Kind != incident.KindMarked {
			continue
		}
		var body incident.Marked
		if err := json.Unmarshal(e.Body, &body); err != nil {
			return fieldError("body", "the form of a body of kind marked", err)
		}
		if err := s.followJoin(w, e, body); err != nil {
			return err
		}
		if err := s.followPlace(w, e, body); err != nil {
			return err
		}
	}
	return nil
}

func (s *Server) followJoin(w *writing, e incident.Event, body incident.Marked) error {
	if body.NewIncident || e.Test || s.book.knows(e.Incident) || w.joins(e.Incident) {
		return nil
	}
	open, ok := w.openFor(e.Drill)
	if !ok || open.ID == e.Incident || e.At.Before(open.OpenedAt.Add(-joinWithin)) {
		return nil
	}
	_, err := w.author(incident.Event{
		Incident: e.Incident, At: e.At, DeviceAt: s.now(), By: serverName, Drill: e.Drill,
	}, incident.KindJoined, incident.Joined{Into: open.ID})
	return err
}

// joins reports whether this commit joins an incident already.
func (w *writing) joins(id incident.IncidentID) bool {
	return slices.ContainsFunc(w.events, func(e incident.Event) bool {
		return e.Kind == incident.KindJoined && e.Incident == id
	})
}

func (s *Server) followPlace(w *writing, e incident.Event, body incident.Marked) error {
	if body.Position.IsSet() {
		return nil
	}
	p, ok := s.vessel.placeAt(e.At, s.now()).Get()
	if !ok {
		return nil
	}
	_, err := w.author(incident.Event{
		Incident: e.Incident, At: e.At, DeviceAt: s.now(), By: serverName, Drill: e.Drill, Test: e.Test,
	}, incident.KindMarkPlaced, incident.MarkPlaced{
		Mark: e.ID, Position: p.position, Source: p.source, ErrorM: p.errorM, FixAgeS: p.fixAgeS,
	})
	return err
}
