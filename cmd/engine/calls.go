package main

import (
	"time"

	"wakeback/drift/nav"
	"wakeback/search/advice"
	"wakeback/search/incident"
)

// methods are the calls a page can make.
var methods = map[string]method{
	"add_events":      addEvents,
	"clear":           forget,
	"states":          states,
	"own":             own,
	"steer":           steer,
	"back":            back,
	"path":            path,
	"propose_search":  propose,
	"cloud":           cloud,
	"searched":        searched,
	"cold_water":      water,
	"classes":         classes,
	"choose_class":    chooseClass,
	"daylight":        daylight,
	"parse_position":  parsePosition,
	"format_position": formatPosition,
}

type eventsIn struct {
	Events []incident.Event `json:"events"`
}

// addEvents puts events into the log and says how many were new.
func addEvents(s *session, in []byte) (any, error) {
	v, err := read[eventsIn](in)
	if err != nil {
		return nil, err
	}
	added := s.log.Add(v.Events...)
	if added > 0 {
		s.states = nil
	}
	return map[string]int{"added": added, "events": s.log.Len()}, nil
}

// forget forgets all events: the server's store is another one.
func forget(s *session, _ []byte) (any, error) {
	s.log, s.states = incident.Log{}, nil
	return map[string]int{"events": 0}, nil
}

func states(s *session, _ []byte) (any, error) {
	return map[string]any{"incidents": s.fold()}, nil
}

// fixIn is a fix as the page has it.
type fixIn struct {
	At       time.Time            `json:"at"`
	Position nav.Position         `json:"position"`
	SogKn    nav.Opt[float64]     `json:"sog_kn"`
	CogDeg   nav.Opt[nav.TrueDeg] `json:"cog_deg"`
	ErrorM   nav.Opt[float64]     `json:"error_m"`
}

type ownIn struct {
	Source     incident.PositionSource `json:"source"`
	Fix        nav.Opt[fixIn]          `json:"fix"`
	HeadingDeg nav.Opt[nav.TrueDeg]    `json:"heading_deg"`
	HeadingAt  nav.Opt[time.Time]      `json:"heading_at"`
	StwKn      nav.Opt[float64]        `json:"stw_kn"`
}

// keepTrack is how much track the page's engine holds: the longest stretch of
// a person missing that a phone alone can be asked about. Our choice.
const keepTrack = 12 * time.Hour

// own takes what a receiver says: the vessel's through the server, or the phone's.
func own(s *session, in []byte) (any, error) {
	v, err := read[ownIn](in)
	if err != nil {
		return nil, err
	}
	src := &s.phone
	switch v.Source {
	case incident.FromPhone:
	case incident.FromVessel, incident.FromDR:
		src = &s.vessel
	default:
		return nil, &incident.FieldError{Field: "source", Expected: `"vessel", "dr" or "phone"`}
	}
	if f, ok := v.Fix.Get(); ok && v.Source != incident.FromDR {
		src.track.Add(nav.Fix{At: f.At, Position: f.Position, SogKn: f.SogKn, CogTrue: f.CogDeg, ErrorM: f.ErrorM})
		src.track.Trim(f.At.Add(-keepTrack))
		src.headingAt = f.At
	}
	src.heading, src.stw = v.HeadingDeg, v.StwKn
	if at, ok := v.HeadingAt.Get(); ok {
		src.headingAt = at
	}
	return map[string]int{"fixes": src.track.Len()}, nil
}

// choose prefers the vessel's receiver while it is fresh, then the phone's,
// then whichever is newer.
func (s *session) choose(now time.Time) advice.Own {
	const fresh = 5 * time.Second // the age at which a fix counts as stale
	v, okV := s.vessel.track.Last().Get()
	p, okP := s.phone.track.Last().Get()
	switch {
	case !okV && !okP:
		return advice.Own{}
	case okV && (!okP || now.Sub(v.At) <= fresh || v.At.After(p.At)):
		return s.vessel.own(v, incident.FromVessel)
	}
	return s.phone.own(p, incident.FromPhone)
}

func (src *source) own(f nav.Fix, from incident.PositionSource) advice.Own {
	return advice.Own{Fix: nav.Some(f), Source: from, Heading: src.heading, HeadingAt: src.headingAt, StwKn: src.stw}
}

type steerIn struct {
	Now      time.Time                  `json:"now"`
	Incident incident.IncidentID        `json:"incident"`
	Person   nav.Opt[incident.PersonNo] `json:"person"`
}

// steer answers with a frame, or null when nothing is open.
func steer(s *session, in []byte) (any, error) {
	v, err := read[steerIn](in)
	if err != nil {
		return nil, err
	}
	if v.Now.IsZero() {
		return nil, &incident.FieldError{Field: "now", Expected: "the time, in RFC 3339"}
	}
	st, ok := s.state(v.Incident)
	if !ok {
		return nil, nil
	}
	return advice.Steer(advice.Input{Now: v.Now, State: st, Own: s.choose(v.Now), Person: v.Person}), nil
}

type backIn struct {
	Mark   incident.EventID   `json:"mark"`
	BackS  nav.Opt[float64]   `json:"back_s"`
	FellAt nav.Opt[time.Time] `json:"fell_at"`
}

type placeOut struct {
	FellAt time.Time `json:"fell_at"`
	incident.Place
}

// back says where a mark would move to, if the fall was some seconds before
// the press or at a time given.
func back(s *session, in []byte) (any, error) {
	v, err := read[backIn](in)
	if err != nil {
		return nil, err
	}
	m, ok := s.mark(v.Mark)
	if !ok {
		return nil, &incident.FieldError{Field: "mark", Expected: "the id of a mark in the log"}
	}
	at, ok := v.FellAt.Get()
	if !ok {
		backS, ok := v.BackS.Get()
		if !ok || backS < 0 {
			return nil, &incident.FieldError{Field: "back_s", Expected: "seconds before the press, from 0, or fell_at"}
		}
		at = m.At.Add(-time.Duration(backS * float64(time.Second)))
	}
	track := s.vessel.track
	if press, ok := m.Press.Get(); ok && press.Source == incident.FromPhone || track.Len() == 0 {
		track = s.phone.track
	}
	place, err := advice.Back(track, m, at)
	if err != nil {
		return nil, err
	}
	return placeOut{at, place}, nil
}

func (s *session) mark(id incident.EventID) (incident.Mark, bool) {
	for _, st := range s.fold() {
		if m, ok := st.Mark(id); ok {
			return m, true
		}
	}
	return incident.Mark{}, false
}

type pathIn struct {
	From time.Time `json:"from"`
	To   time.Time `json:"to"`
}

// path is the stretch of the vessel's track between two moments.
func path(s *session, in []byte) (any, error) {
	v, err := read[pathIn](in)
	if err != nil {
		return nil, err
	}
	track := s.vessel.track
	if track.Len() == 0 {
		track = s.phone.track
	}
	return map[string]any{"path": advice.Path(track, v.From, v.To)}, nil
}

type textIn struct {
	Text string `json:"text"`
}

func parsePosition(_ *session, in []byte) (any, error) {
	v, err := read[textIn](in)
	if err != nil {
		return nil, err
	}
	return nav.ParsePosition(v.Text)
}

type positionIn struct {
	Position nav.Position `json:"position"`
}

// formatPosition prints a position in the form for screens, and spoken.
func formatPosition(_ *session, in []byte) (any, error) {
	v, err := read[positionIn](in)
	if err != nil {
		return nil, err
	}
	return map[string]any{"text": nav.FormatDM(v.Position, 3), "spoken": nav.Spoken(v.Position)}, nil
}
