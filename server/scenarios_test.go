package server

import (
	"encoding/json"
	"fmt"
	"math"
	"net/http"
	"testing"
	"time"

	"wakeback/drift/nav"
	"wakeback/search/incident"
	"wakeback/server/feed"
)

// The scenarios of the acceptance list that a server can show, by number.
// Figures of a scenario have a tolerance of 5 m or one per cent.

// somewhere is a fixture.
var somewhere = nav.PositionFromDegrees(54.1, 7.9)

func (r *rig) markNow(more map[string]any) markAnswer {
	r.t.Helper()
	in := map[string]any{"id": newID(), "at": r.clock.now()}
	for k, v := range more {
		in[k] = v
	}
	var a markAnswer
	if resp := r.do("POST", api+"/marks", in, &a); resp.StatusCode != http.StatusCreated {
		r.t.Fatalf("POST /marks = %d, want 201", resp.StatusCode)
	}
	return a
}

func apart(t *testing.T, a, b incident.Mark) float64 {
	t.Helper()
	pa, okA := a.Place.Get()
	pb, okB := b.Place.Get()
	if !okA || !okB {
		t.Fatalf("marks without a place: %+v, %+v", a, b)
	}
	return nav.Inverse(pa.Position, pb.Position).RangeM
}

func near(t *testing.T, what string, got, want float64) {
	t.Helper()
	if tol := max(5, want/100); math.Abs(got-want) > tol {
		t.Errorf("%s = %.1f m, want %.0f within %.0f", what, got, want, tol)
	}
}

func TestScenario05TwoMarks40sApart(t *testing.T) {
	r := rigOn(t, realStore(t), nil)
	r.bridge.set(sailing(somewhere, start, 0, 7))
	first := r.markNow(nil)
	r.clock.add(40 * time.Second)
	second := r.markNow(nil)
	if first.Incident.ID != second.Incident.ID {
		t.Fatalf("incidents %s and %s, want one", first.Incident.ID, second.Incident.ID)
	}
	st := r.only()
	if len(st.Marks) != 2 || st.Marks[0].Number != 1 || st.Marks[1].Number != 2 {
		t.Fatalf("marks = %+v, want #1 and #2", st.Marks)
	}
	near(t, "between the marks", apart(t, st.Marks[0], st.Marks[1]), 144)
	if w := st.Persons[0].WorkingMark.Or(""); w != first.Event.ID {
		t.Errorf("working mark = %s, want the first, %s", w, first.Event.ID)
	}
	ear := r.listen("", nil)
	r.turn()
	steer := ear.wait("steer", nil)
	if mark := steer["mark"].(map[string]any); mark["event"] != string(first.Event.ID) {
		t.Errorf("steering by %v, want the first mark", mark["event"])
	}
}

// gone is a vessel whose receiver fell silent at a moment: its dead reckoning
// is what package feed makes of that.
func gone(last nav.Position, since time.Time, cog nav.TrueDeg, sogKn float64) func(time.Time) feed.Vessel {
	return func(now time.Time) feed.Vessel {
		age := now.Sub(since)
		v := sailing(last, since, cog, sogKn)(since)
		run := sogKn * nav.MsPerKn * age.Seconds()
		p, _ := nav.Direct(last, cog, run)
		v.Position = nav.Some(feed.Reading[nav.Position]{Value: last, At: since, AgeS: age.Seconds(), Stale: true})
		v.DeadReckoned = nav.Some(feed.DeadReckoned{Position: p, FixAgeS: age.Seconds(), RunM: run, ErrorM: 8 + 0.6*age.Seconds()})
		return v
	}
}

func TestScenario08NoFixAtPress(t *testing.T) {
	r := rigOn(t, realStore(t), nil)
	lastFix := start.Add(-95 * time.Second)
	r.bridge.set(gone(somewhere, lastFix, 90, 6.5))
	ear := r.listen("", nil)
	a := r.markNow(nil)
	var body incident.Marked
	if err := json.Unmarshal(a.Event.Body, &body); err != nil {
		t.Fatal(err)
	}
	if body.Source != incident.FromDR || body.FixAgeS.Or(0) != 95 {
		t.Errorf("source %q, fix age %v, want dr and 95 s", body.Source, body.FixAgeS)
	}
	near(t, "ahead of the last fix", nav.Inverse(somewhere, body.Position.Or(somewhere)).RangeM, 318)
	if e := body.ErrorM.Or(0); e <= 8 {
		t.Errorf("error = %v m, want one that has grown", e)
	}
	r.turn()
	fix := ear.wait("fix", nil)
	if fix["source"] != "dr" || fix["stale"] != true || fix["age_s"].(float64) != 95 {
		t.Errorf("fix = %v, want dr, stale, 95 s old", fix)
	}
	before := fix["error_m"].(float64)
	r.clock.add(10 * time.Second)
	r.turn()
	fix = ear.wait("fix", nil)
	if after := fix["error_m"].(float64); after <= before {
		t.Errorf("error went from %v to %v m, want it to grow", before, after)
	}
	steer := ear.wait("steer", func(m map[string]any) bool { return m["at"] != start.Format(time.RFC3339) })
	if f := steer["fix"].(map[string]any); f["stale"] != true || f["age_s"].(float64) != 105 {
		t.Errorf("steer's fix = %v, want stale and 105 s old", f)
	}
}

func TestScenario09NoFixEver(t *testing.T) {
	r := rigOn(t, realStore(t), nil)
	ear := r.listen("", nil)
	a := r.markNow(nil)
	var body incident.Marked
	if err := json.Unmarshal(a.Event.Body, &body); err != nil {
		t.Fatal(err)
	}
	if body.Source != incident.FromNothing || body.Position.IsSet() {
		t.Errorf("source %q, position %v, want nothing and none", body.Source, body.Position)
	}
	r.clock.add(12 * time.Second)
	r.turn()
	steer := ear.wait("steer", nil)
	if steer["elapsed_s"] != 12.0 || steer["range_m"] != nil || steer["fix"] != nil || steer["datum"] != nil {
		t.Errorf("steer = %v, want the clock running and null for what is not known", steer)
	}
	// The log takes everything else.
	p := newPhone()
	note := p.write(t, a.Incident.ID, r.clock.now(), incident.KindNote, incident.Note{Text: "position unknown, by land: lighthouse astern"})
	if resp := r.do("POST", eventsPath(a.Incident.ID), batchOf(note), nil); resp.StatusCode != http.StatusOK {
		t.Errorf("note = %d, want 200", resp.StatusCode)
	}
}

func TestScenario10WrongClock(t *testing.T) {
	r := rigOn(t, realStore(t), nil)
	const fast = 3*time.Minute + 12*time.Second
	ear := r.listen("", nil)
	ear.wait("hello", nil)
	onPhone := func() time.Time { return r.clock.now().Add(fast) }
	sent := onPhone()
	ear.say(map[string]any{"t": "time", "client_ms": sent.UnixMilli()})
	answer := ear.wait("time", nil)
	offset := time.Duration(int64(answer["server_ms"].(float64))-(sent.UnixMilli()+onPhone().UnixMilli())/2) * time.Millisecond
	if offset != -fast {
		t.Fatalf("offset = %v, want %v", offset, -fast)
	}
	p := newPhone()
	in := incident.IncidentID(newID())
	errorMs := int64(1)
	e, err := incident.New(incident.Event{
		ID: incident.EventID(newID()), Incident: in, Device: p.id, DeviceSeq: 1,
		At: onPhone().Add(offset), DeviceAt: onPhone(), ClockErrorMs: &errorMs,
	}, incident.KindMarked, incident.Marked{Position: nav.Some(somewhere), Source: incident.FromPhone})
	if err != nil {
		t.Fatal(err)
	}
	if resp := r.do("POST", eventsPath(in), batchOf(e), nil); resp.StatusCode != http.StatusOK {
		t.Fatalf("POST events = %d, want 200", resp.StatusCode)
	}
	m := r.only().Marks[0]
	if !m.At.Equal(start) || !m.DeviceAt.Equal(start.Add(fast)) {
		t.Errorf("mark at %v (device %v), want common time %v and the offset kept", m.At, m.DeviceAt, start)
	}
	// A script that cannot measure says a moment in the future: it is kept, and
	// its clock is known to be wrong by that much at least.
	a := r.markNow(map[string]any{"at": onPhone()})
	if got := a.Event.ClockErrorMs; got == nil || *got != fast.Milliseconds() {
		t.Errorf("clock error = %v ms, want %d", got, fast.Milliseconds())
	}
}

func TestScenario31TwoPersons(t *testing.T) {
	r := rigOn(t, realStore(t), nil)
	r.bridge.set(sailing(somewhere, start, 45, 9))
	a := r.markNow(map[string]any{"person": 1})
	r.clock.add(55 * time.Second)
	b := r.markNow(map[string]any{"person": 2})
	st := r.only()
	if len(st.Marks) != 2 || len(st.Persons) != 2 {
		t.Fatalf("%d marks and %d persons, want 2 and 2", len(st.Marks), len(st.Persons))
	}
	near(t, "between the falls", apart(t, st.Marks[0], st.Marks[1]), 255)
	ear := r.listen("", nil)
	r.turn()
	elapsed := map[float64]float64{}
	for range 2 {
		m := ear.wait("steer", nil)
		elapsed[m["person"].(float64)] = m["elapsed_s"].(float64)
	}
	if elapsed[1] != 55 || elapsed[2] != 0 {
		t.Errorf("clocks = %v, want each person's own: 55 and 0 s", elapsed)
	}
	p := newPhone()
	aboard := p.write(t, a.Incident.ID, r.clock.now(), incident.KindAboard, incident.Aboard{Person: nav.Some(incident.PersonNo(1)), Condition: "conscious"})
	if resp := r.do("POST", eventsPath(a.Incident.ID), batchOf(aboard), nil); resp.StatusCode != http.StatusOK {
		t.Fatalf("aboard = %d, want 200", resp.StatusCode)
	}
	st = r.only()
	first, _ := st.Person(1)
	second, _ := st.Person(2)
	if first.Status != incident.IsAboard || second.Status != incident.InWater || !st.Live() {
		t.Errorf("after recovering A: A %s, B %s, live %t; want aboard, in_water, true", first.Status, second.Status, st.Live())
	}
	r.clock.add(time.Second)
	r.turn()
	m := ear.wait("steer", func(m map[string]any) bool { return m["elapsed_s"] == 1.0 })
	if m["person"] != 2.0 || m["mark"].(map[string]any)["event"] != string(b.Event.ID) {
		t.Errorf("steering for %v, want person 2 and the mark of B", m["person"])
	}
}

func TestScenario32HelperGoesIn(t *testing.T) {
	r := rigOn(t, realStore(t), nil)
	r.bridge.set(sailing(somewhere, start, 180, 2))
	a := r.markNow(map[string]any{"person": 1})
	p := newPhone()
	say := func(events ...incident.Event) {
		t.Helper()
		if resp := r.do("POST", eventsPath(a.Incident.ID), batchOf(events...), nil); resp.StatusCode != http.StatusOK {
			t.Fatalf("POST events = %d, want 200", resp.StatusCode)
		}
	}
	r.clock.add(5 * time.Minute)
	say(p.write(t, a.Incident.ID, r.clock.now(), incident.KindHeadCount, incident.HeadCount{Aboard: 4}),
		p.write(t, a.Incident.ID, r.clock.now(), incident.KindAlongside, incident.OfPerson{Person: nav.Some(incident.PersonNo(1))}))
	r.clock.add(20 * time.Second)
	boat := feed.Fresh(r.bridge.Vessel(r.clock.now()).Position)
	say(p.write(t, a.Incident.ID, r.clock.now(), incident.KindMarked, incident.Marked{Person: nav.Some(incident.PersonNo(2)), Source: incident.FromNothing}),
		p.write(t, a.Incident.ID, r.clock.now(), incident.KindHeadCount, incident.HeadCount{Aboard: 3}))
	st := r.only()
	first, _ := st.Person(1)
	second, _ := st.Person(2)
	if first.Status != incident.Alongside || second.Status != incident.InWater {
		t.Errorf("A %s, B %s, want alongside and in_water", first.Status, second.Status)
	}
	if h, _ := st.HeadCount.Get(); h.Aboard != 3 {
		t.Errorf("head-count = %d aboard, want 3", h.Aboard)
	}
	place, ok := st.Marks[1].Place.Get()
	if !ok {
		t.Fatal("the second mark has no place, want the boat's")
	}
	if d := nav.Inverse(place.Position, boat.Or(somewhere)).RangeM; d > 5 {
		t.Errorf("the second mark lies %.1f m from the boat", d)
	}
}

// TestScenario35ServerDies: phones go on alone, the server comes back on the
// same store, and everyone sends what they have, several times.
func TestScenario35ServerDies(t *testing.T) {
	st := realStore(t)
	r := rigOn(t, st, nil)
	r.bridge.set(sailing(somewhere, start, 0, 6))
	a := r.markNow(nil)
	phones := []*phone{newPhone(), newPhone()}
	sent := []incident.Event{a.Event}
	var alone []incident.Event
	for i, p := range phones {
		e := p.write(t, a.Incident.ID, r.clock.now(), incident.KindNote, incident.Note{Text: fmt.Sprint("before ", i)})
		if resp := r.do("POST", eventsPath(a.Incident.ID), batchOf(e), nil); resp.StatusCode != http.StatusOK {
			t.Fatalf("POST events = %d", resp.StatusCode)
		}
		sent = append(sent, e)
	}
	r.clock.add(6 * time.Minute)
	for i, p := range phones { // nobody answers
		alone = append(alone,
			p.write(t, a.Incident.ID, r.clock.now(), incident.KindSeen, incident.Seen{What: "light"}),
			p.write(t, a.Incident.ID, r.clock.now(), incident.KindNote, incident.Note{Text: fmt.Sprint("alone ", i)}))
	}
	r2 := rigOn(t, st.again(t), func(c *Config) { c.Now = r.clock.now })
	ear := r2.listen("?after=1&epoch="+st.Epoch(), nil)
	if hello := ear.wait("hello", nil); hello["last_seq"] != 3.0 || hello["reset"] != false {
		t.Errorf("hello = %v, want what was acknowledged, 3 events, and no reset", hello)
	}
	for range 3 { // each sends all it has, again and again
		all := append(append([]incident.Event{}, sent[1:]...), alone...)
		if resp := r2.do("POST", eventsPath(a.Incident.ID), batchOf(all...), nil); resp.StatusCode != http.StatusOK {
			t.Fatalf("POST events = %d", resp.StatusCode)
		}
	}
	var log eventsAnswer
	r2.do("GET", eventsPath(a.Incident.ID), nil, &log)
	seen := map[incident.EventID]int{}
	for _, e := range log.Events {
		seen[e.ID]++
	}
	for _, e := range append(sent, alone...) {
		if seen[e.ID] != 1 {
			t.Errorf("event %s (%s) is in the log %d times, want once", e.ID, e.Kind, seen[e.ID])
		}
	}
	if len(log.Events) != len(sent)+len(alone) || log.LastSeq != incident.Seq(len(log.Events)) {
		t.Errorf("%d events up to %d, want %d", len(log.Events), log.LastSeq, len(sent)+len(alone))
	}
	for want := 2; want <= len(log.Events); want++ {
		e := ear.wait("event", nil)["event"].(map[string]any)
		if e["seq"] != float64(want) {
			t.Fatalf("streamed event %v, want %d", e["seq"], want)
		}
	}
}
