package main

import (
	"encoding/json"
	"fmt"
	"os"
	"strings"
	"testing"
	"time"

	"wakeback/search/advice"
	"wakeback/search/incident"
)

var t0 = time.Date(2026, 6, 1, 2, 14, 7, 0, time.UTC)

// ask makes a call and reads what is under "ok".
func ask[T any](t *testing.T, s *session, name, in string) T {
	t.Helper()
	out := s.call(name, in)
	var a struct {
		OK    T        `json:"ok"`
		Error *problem `json:"error"`
	}
	if err := json.Unmarshal([]byte(out), &a); err != nil {
		t.Fatalf("%s answers %s: %v", name, out, err)
	}
	if a.Error != nil {
		t.Fatalf("%s(%s): %+v", name, in, *a.Error)
	}
	return a.OK
}

func refused(t *testing.T, s *session, name, in string) problem {
	t.Helper()
	var a struct{ Error *problem }
	out := s.call(name, in)
	if err := json.Unmarshal([]byte(out), &a); err != nil || a.Error == nil {
		t.Fatalf("%s(%s) = %s, want an error", name, in, out)
	}
	return *a.Error
}

func markEvent(t *testing.T) string {
	t.Helper()
	e, err := incident.New(incident.Event{
		ID: "018f3c2e-0000-7000-8000-000000000001", Incident: "018f3c2e-7b1a-7c3d-9e4f-000000000001",
		Device: "de000000-0000-4000-8000-000000000001", DeviceSeq: 1, At: t0, DeviceAt: t0,
	}, incident.KindMarked, json.RawMessage(`{"source":"phone","position":{"lat":54.1,"lon":7.9},"sog_kn":8,"cog_deg":0}`))
	if err != nil {
		t.Fatal(err)
	}
	text, _ := json.Marshal(map[string]any{"events": []incident.Event{e}})
	return string(text)
}

// A phone that is alone: it marks, gets a frame from its own position, and
// moves the mark back along its own track.
func TestAPhoneAlone(t *testing.T) {
	s := newSession()
	for i := range 60 {
		ask[any](t, s, "own", fmt.Sprintf(`{"source":"phone","fix":{"at":%q,"position":{"lat":%f,"lon":7.9},"sog_kn":8,"cog_deg":0}}`,
			t0.Add(time.Duration(i-59)*time.Second).Format(time.RFC3339), 54.1+float64(i-59)*4.1155/111_000))
	}
	added := ask[map[string]int](t, s, "add_events", markEvent(t))
	if added["added"] != 1 {
		t.Fatalf("added %v", added)
	}
	again := ask[map[string]int](t, s, "add_events", markEvent(t))
	if again["added"] != 0 {
		t.Errorf("the same event again: %v", again)
	}
	f := ask[*advice.Frame](t, s, "steer", fmt.Sprintf(`{"now":%q}`, t0.Add(2*time.Second).Format(time.RFC3339)))
	if f == nil || !f.Datum.IsSet() || !f.RangeM.IsSet() {
		t.Fatalf("frame = %+v", f)
	}
	b := ask[placeOut](t, s, "back", `{"mark":"018f3c2e-0000-7000-8000-000000000001","back_s":25}`)
	if b.Source != incident.FromTrack || !b.FellAt.Equal(t0.Add(-25*time.Second)) || b.Position.LatDeg() > 54.0995 {
		t.Errorf("back = %+v", b)
	}
}

func TestNothingOpenIsNull(t *testing.T) {
	s := newSession()
	if out := s.call("steer", `{"now":"2026-06-01T02:14:07Z"}`); out != `{"ok":null}` {
		t.Errorf("steer = %s", out)
	}
}

func TestRefusalsNameTheField(t *testing.T) {
	s := newSession()
	tests := []struct{ call, in, field, says string }{
		{"steer", `{}`, "now", "RFC 3339"},
		{"own", `{"source":"star"}`, "source", "phone"},
		{"own", `{"source":"phone","fix":{"at":"2026-06-01T02:14:07Z","position":{"lat":91,"lon":0}}}`, "position", "-90 to 90"},
		{"back", `{"mark":"x"}`, "mark", "id of a mark"},
		{"parse_position", `{"text":"somewhere"}`, "position", "expected"},
		{"steer", `{`, "", "read the input"},
		{"dance", `{}`, "name", "no such call"},
	}
	for _, tt := range tests {
		p := refused(t, s, tt.call, tt.in)
		if p.Field != tt.field || !strings.Contains(p.Message, tt.says) {
			t.Errorf("%s(%s) = %+v, want field %q and %q", tt.call, tt.in, p, tt.field, tt.says)
		}
	}
}

// The vectors that the page makes its hashes by fold here too.
func TestEventsOfThePage(t *testing.T) {
	text, err := os.ReadFile("../../search/incident/testdata/hash-vectors.json")
	if err != nil {
		t.Fatal(err)
	}
	s := newSession()
	ask[any](t, s, "add_events", `{"events":`+string(text)+`}`)
	got := ask[struct{ Incidents []incident.State }](t, s, "states", "")
	if len(got.Incidents) != 1 || len(got.Incidents[0].Marks) != 2 {
		t.Errorf("states = %+v", got)
	}
}

// From a mark to a search that can be laid: the page adds the event as it is.
func TestProposeSearch(t *testing.T) {
	s := newSession()
	ask[any](t, s, "add_events", markEvent(t))
	got := ask[struct{ Proposals []proposalOut }](t, s, "propose_search",
		fmt.Sprintf(`{"now":%q,"speed_kn":6,"visibility_nm":10}`, t0.Add(10*time.Minute).Format(time.RFC3339)))
	if len(got.Proposals) != 2 || len(got.Proposals[0].Body.Legs) < 5 || got.Proposals[0].Body.Reason == "" {
		t.Fatalf("proposals = %+v", got)
	}
	laid, err := incident.New(incident.Event{
		ID: "018f3c2e-0000-7000-8000-000000000002", Incident: "018f3c2e-7b1a-7c3d-9e4f-000000000001",
		Device: "de000000-0000-4000-8000-000000000001", DeviceSeq: 2, At: t0.Add(10 * time.Minute), DeviceAt: t0.Add(10 * time.Minute),
	}, incident.KindSearchLaid, got.Proposals[0].Body)
	if err != nil {
		t.Fatal(err)
	}
	if err := laid.Validate(); err != nil {
		t.Errorf("a proposal cannot be laid: %v", err)
	}
	if p := refused(t, s, "propose_search", fmt.Sprintf(`{"now":%q,"speed_kn":0}`, t0.Format(time.RFC3339))); !strings.Contains(p.Message, "speed") {
		t.Errorf("no speed: %+v", p)
	}
}

// The cloud is the same on every screen, and goes on from where it was.
func TestCloud(t *testing.T) {
	at := func(minutes int) string {
		return fmt.Sprintf(`{"now":%q,"members":500}`, t0.Add(time.Duration(minutes)*time.Minute).Format(time.RFC3339))
	}
	a, b := newSession(), newSession()
	for _, s := range []*session{a, b} {
		ask[any](t, s, "add_events", markEvent(t))
	}
	ask[cloudOut](t, a, "cloud", at(5))
	one, other := ask[cloudOut](t, a, "cloud", at(10)), ask[cloudOut](t, b, "cloud", at(10))
	if one.N != 500 || len(one.Regions) != 2 || len(one.Regions[0].Rings) == 0 || len(one.Points) < 100 {
		t.Fatalf("cloud = %d members, %d regions, %d points", one.N, len(one.Regions), len(one.Points))
	}
	if one.Mean != other.Mean || one.R95M != other.R95M {
		t.Errorf("two phones differ: %+v and %+v", one.Mean, other.Mean)
	}
	if one.R95M <= one.R50M {
		t.Errorf("r95 %v, r50 %v", one.R95M, one.R50M)
	}
}

// Searched is what was run while a leg was being steered, and a leg that is
// planned is not searched.
func TestSearched(t *testing.T) {
	s := newSession()
	ask[any](t, s, "add_events", markEvent(t))
	now := t0.Add(20 * time.Minute).Format(time.RFC3339)
	got := ask[struct{ Proposals []proposalOut }](t, s, "propose_search", fmt.Sprintf(`{"now":%q,"speed_kn":6,"visibility_nm":10}`, t0.Add(10*time.Minute).Format(time.RFC3339)))
	say := func(n int, kind incident.Kind, minutes float64, body any) incident.EventID {
		at := t0.Add(time.Duration(minutes * float64(time.Minute)))
		e, err := incident.New(incident.Event{
			ID: incident.EventID(fmt.Sprintf("018f3c2e-0000-7000-8000-0000000001%02d", n)), Incident: "018f3c2e-7b1a-7c3d-9e4f-000000000001",
			Device: "de000000-0000-4000-8000-000000000001", DeviceSeq: uint64(n + 1), At: at, DeviceAt: at,
		}, kind, body)
		if err != nil {
			t.Fatal(err)
		}
		text, _ := json.Marshal(map[string]any{"events": []incident.Event{e}})
		ask[any](t, s, "add_events", string(text))
		return e.ID
	}
	laid := say(1, incident.KindSearchLaid, 10, got.Proposals[0].Body)
	before := ask[searchedOut](t, s, "searched", fmt.Sprintf(`{"now":%q,"members":500}`, now))
	if before.RunM != 0 || before.POD.IsSet() || len(before.Runs) != 0 {
		t.Errorf("a plan counts as searched: %+v", before)
	}
	say(2, incident.KindLegBegun, 11, incident.LegBegun{Search: laid, Leg: 1})
	for i := range 61 { // a minute on the leg
		ask[any](t, s, "own", fmt.Sprintf(`{"source":"vessel","fix":{"at":%q,"position":{"lat":%f,"lon":7.9},"sog_kn":6,"cog_deg":0}}`,
			t0.Add(11*time.Minute+time.Duration(i)*time.Second).Format(time.RFC3339), 54.1+float64(i)*3.0867/111_300))
	}
	say(3, incident.KindLegEnded, 12, incident.LegEnded{Search: laid, Leg: 1, Part: 0.4, How: "broken_off"})
	after := ask[searchedOut](t, s, "searched", fmt.Sprintf(`{"now":%q,"members":500}`, now))
	if after.RunM < 170 || after.RunM > 200 || len(after.Runs) != 60 || after.POD.Or(0) <= 0 || after.POD.Or(1) >= 1 {
		t.Errorf("searched = %v m, %d pieces, POD %v", after.RunM, len(after.Runs), after.POD)
	}
}
