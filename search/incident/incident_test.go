package incident

import (
	"encoding/json"
	"fmt"
	"testing"
	"time"

	"wakeback/drift/nav"
)

// story builds logs for tests: devices by letter, times in seconds from t0.
type story struct {
	t    testing.TB
	last map[string]Event
	n    int
	inc  IncidentID
	all  []Event
}

var t0 = time.Date(2026, 6, 1, 2, 14, 7, 0, time.UTC)

func newStory(t testing.TB) *story {
	return &story{t: t, last: map[string]Event{}, inc: incidentID(1)}
}

func incidentID(n int) IncidentID {
	return IncidentID(fmt.Sprintf("018f3c2e-7b1a-7c3d-9e4f-%012d", n))
}

func deviceID(letter string) DeviceID {
	return DeviceID(fmt.Sprintf("de000000-0000-4000-8000-%012x", letter[0]))
}

func (s *story) at(sec float64) time.Time { return t0.Add(time.Duration(sec * float64(time.Second))) }

// say adds an event of a device at a time.
func (s *story) say(device string, sec float64, kind Kind, body any, change ...func(*Event)) Event {
	s.t.Helper()
	s.n++
	before := s.last[device]
	draft := Event{
		ID:       EventID(fmt.Sprintf("018f3c2e-0000-7000-8000-%012d", s.n)),
		Incident: s.inc, Device: deviceID(device), DeviceSeq: before.DeviceSeq + 1, PrevHash: before.Hash,
		At: s.at(sec), DeviceAt: s.at(sec), By: device,
	}
	for _, c := range change {
		c(&draft)
	}
	e, err := New(draft, kind, body)
	if err != nil {
		s.t.Fatalf("make %s: %v", kind, err)
	}
	if err := e.Validate(); err != nil {
		s.t.Fatalf("validate %s: %v", kind, err)
	}
	s.last[device] = e
	s.all = append(s.all, e)
	return e
}

func (s *story) state() State {
	s.t.Helper()
	states := Fold(s.all)
	if len(states) != 1 {
		s.t.Fatalf("fold gives %d incidents, want 1", len(states))
	}
	return states[0]
}

func at(lat, lon float64) nav.Opt[nav.Position] {
	return nav.Some(nav.PositionFromDegrees(lat, lon))
}

func markedAt(lat, lon float64) Marked {
	return Marked{Position: at(lat, lon), Source: FromVessel, ErrorM: nav.Some(10.0)}
}

func toJSON(t testing.TB, v any) string {
	t.Helper()
	text, err := json.MarshalIndent(v, "", " ")
	if err != nil {
		t.Fatal(err)
	}
	return string(text)
}
