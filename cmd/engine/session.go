package main

import (
	"encoding/json"
	"errors"
	"fmt"
	"runtime/debug"
	"strings"
	"time"

	"wakeback/drift/nav"
	"wakeback/search/advice"
	"wakeback/search/incident"
)

// session is what the engine holds for its page. JavaScript calls it from one
// thread, so it has no lock.
type session struct {
	log     incident.Log
	states  []incident.State // fold of log; nil when it has to be made anew
	vessel  source
	phone   source
	kept    cloudKept
	methods map[string]method
}

// source is one receiver's newest word and its track.
type source struct {
	track     nav.Track
	heading   nav.Opt[nav.TrueDeg]
	headingAt time.Time
	stw       nav.Opt[float64]
}

type method func(s *session, in []byte) (any, error)

func newSession() *session { return &session{methods: methods} }

// The two forms of an answer.
type (
	answer struct {
		OK any `json:"ok"`
	}
	refusal struct {
		Error problem `json:"error"`
	}
)

type problem struct {
	Code    string `json:"code"`
	Field   string `json:"field"`
	Message string `json:"message"`
}

// call runs one method. A panic becomes an answer, so that a fault in one
// call does not take away the others.
func (s *session) call(name, in string) (out string) {
	defer func() {
		if r := recover(); r != nil {
			out = write(refusal{problem{Code: "fault", Message: fmt.Sprintf("%s: %v\n%s", name, r, debug.Stack())}})
		}
	}()
	m, ok := s.methods[name]
	if !ok {
		return write(refusal{problem{Code: "unknown_call", Field: "name", Message: "no such call: " + name}})
	}
	v, err := m(s, []byte(in))
	if err != nil {
		return write(refusal{problemOf(err)})
	}
	return write(answer{v})
}

func write(a any) string {
	text, err := json.Marshal(a)
	if err != nil {
		text, _ = json.Marshal(refusal{problem{Code: "fault", Message: err.Error()}})
	}
	return string(text)
}

func problemOf(err error) problem {
	p := problem{Code: "refused", Message: err.Error()}
	var fe *incident.FieldError
	var te *json.UnmarshalTypeError
	switch {
	case errors.As(err, &fe):
		p.Field = fe.Field
	case errors.As(err, &te):
		p.Field = te.Field
	case errors.Is(err, nav.ErrPosition):
		p.Field = "position"
	case errors.Is(err, advice.ErrNoTrack):
		p.Code = "no_track"
	}
	return p
}

// read decodes the input of a call.
func read[T any](in []byte) (T, error) {
	var v T
	if len(strings.TrimSpace(string(in))) == 0 {
		in = []byte("{}")
	}
	if err := json.Unmarshal(in, &v); err != nil {
		return v, fmt.Errorf("read the input: %w", err)
	}
	return v, nil
}

func (s *session) fold() []incident.State {
	if s.states == nil {
		s.states = s.log.States()
	}
	return s.states
}

// state finds an incident by id; without one, the incident to show.
func (s *session) state(id incident.IncidentID) (incident.State, bool) {
	if id == "" {
		return advice.Choose(s.fold())
	}
	for _, st := range s.fold() {
		if st.ID == id {
			return st, true
		}
		for _, j := range st.Joined {
			if j == id {
				return st, true
			}
		}
	}
	return incident.State{}, false
}
