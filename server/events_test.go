package server

import (
	"net/http"
	"strings"
	"testing"
	"time"

	"wakeback/drift/nav"
	"wakeback/search/incident"
	"wakeback/server/gate"
)

func marked() incident.Marked {
	return incident.Marked{Position: nav.Some(somewhere), Source: incident.FromPhone}
}

func TestBatchIsAllOrNothingAndIdempotent(t *testing.T) {
	r := rigOn(t, realStore(t), nil)
	p, in := newPhone(), incident.IncidentID(newID())
	a, b := p.write(t, in, start, incident.KindMarked, marked()), p.write(t, in, start, incident.KindNote, incident.Note{Text: "x"})
	bad := b
	bad.Hash = strings.Repeat("0", 64)
	var problem Problem
	if resp := r.do("POST", eventsPath(in), batchOf(a, bad), &problem); resp.StatusCode != 400 || problem.Field != "events[1].hash" {
		t.Errorf("wrong hash = %d %+v, want 400 about events[1].hash", resp.StatusCode, problem)
	}
	if n := len(r.book.states()); n != 0 {
		t.Fatalf("%d incidents after a refused batch, want none", n)
	}
	var first, again batchAnswer
	if resp := r.do("POST", eventsPath(in), batchOf(a, b), &first); resp.StatusCode != 200 {
		t.Fatalf("POST = %d", resp.StatusCode)
	}
	if first.LastSeq != 2 || !first.Events[0].New || first.Events[1].Seq != 2 {
		t.Errorf("answer = %+v, want both new, 1 and 2", first)
	}
	r.do("POST", eventsPath(in), batchOf(b, a, b), &again)
	if again.Events[0].New || again.Events[0].Seq != 2 || again.Events[1].Seq != 1 {
		t.Errorf("repeat = %+v, want the same numbers and nothing new", again)
	}
	other := p.write(t, in, start, incident.KindNote, incident.Note{Text: "y"})
	other.ID = b.ID
	other, err := other.Seal()
	if err != nil {
		t.Fatal(err)
	}
	if resp := r.do("POST", eventsPath(in), batchOf(other), &problem); resp.StatusCode != 409 || problem.Field != "id" && problem.Field != "events[0].id" {
		t.Errorf("same id, other content = %d %+v, want 409 about the id", resp.StatusCode, problem)
	}
	if st := r.only(); st.Events != 2 {
		t.Errorf("%d events, want 2", st.Events)
	}
}

func TestMarksMadeApartAreJoined(t *testing.T) {
	r := rigOn(t, realStore(t), nil)
	a, b, c, d := newPhone(), newPhone(), newPhone(), newPhone()
	send := func(p *phone, at time.Time, body incident.Marked) incident.IncidentID {
		t.Helper()
		in := incident.IncidentID(newID())
		if resp := r.do("POST", eventsPath(in), batchOf(p.write(t, in, at, incident.KindMarked, body)), nil); resp.StatusCode != 200 {
			t.Fatalf("POST = %d", resp.StatusCode)
		}
		return in
	}
	first := send(a, start, marked())
	second := send(b, start.Add(9*time.Second), marked())
	st := r.only()
	if st.ID != first || len(st.Marks) != 2 || len(st.Joined) != 1 || st.Joined[0] != second {
		t.Errorf("incident %s with %d marks, joined %v; want %s, 2, %s", st.ID, len(st.Marks), st.Joined, first, second)
	}
	var got incident.State
	if r.do("GET", api+"/incidents/"+string(second), nil, &got); got.ID != first {
		t.Errorf("GET of the joined incident gives %s, want %s", got.ID, first)
	}
	own := marked()
	own.NewIncident = true
	send(c, start, own)
	if n := len(r.book.states()); n != 2 {
		t.Errorf("%d incidents after new_incident, want 2", n)
	}
	send(d, start.Add(-2*time.Hour), marked()) // a mark from before the watch
	if n := len(r.book.states()); n != 3 {
		t.Errorf("%d incidents after an old mark, want 3: it would come first in the open one", n)
	}
}

func TestEventsArePaged(t *testing.T) {
	r := rigOn(t, realStore(t), nil)
	a := r.markNow(map[string]any{"position": somewhere})
	p := newPhone()
	for range 3 {
		var batch []incident.Event
		for range 3 {
			batch = append(batch, p.write(t, a.Incident.ID, start, incident.KindNote, incident.Note{Text: "x"}))
		}
		r.do("POST", eventsPath(a.Incident.ID), batchOf(batch...), nil)
	}
	var all []incident.Event
	for after, path := incident.Seq(0), ""; ; {
		path = eventsPath(a.Incident.ID) + "?limit=4&after=" + itoa(after)
		var page eventsAnswer
		r.do("GET", path, nil, &page)
		all = append(all, page.Events...)
		if after = page.LastSeq; !page.More {
			break
		}
	}
	for i, e := range all {
		if e.Seq != incident.Seq(i+1) {
			t.Fatalf("event %d has number %d", i, e.Seq)
		}
	}
	if len(all) != 10 {
		t.Errorf("%d events, want 10", len(all))
	}
}

func TestEventsOverTheStream(t *testing.T) {
	r := rigOn(t, realStore(t), nil)
	ear := r.listen("", nil)
	p, in := newPhone(), incident.IncidentID(newID())
	a, b := p.write(t, in, start, incident.KindMarked, marked()), p.write(t, in, start, incident.KindNote, incident.Note{Text: "x"})
	ear.say(map[string]any{"t": "event", "event": a})
	if ids := ear.wait("ack", nil)["ids"].([]any); len(ids) != 1 || ids[0] != string(a.ID) {
		t.Errorf("ack of %v, want %s", ids, a.ID)
	}
	if _, ok, err := r.store.Event(a.ID); !ok || err != nil {
		t.Errorf("acknowledged, but not in the store: %v", err)
	}
	ear.say(map[string]any{"t": "event", "events": []incident.Event{a, b}})
	if ids := ear.wait("ack", nil)["ids"].([]any); len(ids) != 2 {
		t.Errorf("ack of %v, want both", ids)
	}
	b.Hash = "no"
	ear.say(map[string]any{"t": "event", "event": b})
	if m := ear.wait("problem", nil); m["code"] != "invalid" || m["field"] != "events[0].hash" {
		t.Errorf("problem = %v, want one about events[0].hash", m)
	}
	ear.say(map[string]any{"t": "dance"})
	if m := ear.wait("problem", nil); m["field"] != "t" {
		t.Errorf("problem = %v, want one about t", m)
	}
}

func TestStoreThatCannotWrite(t *testing.T) {
	st := newMemStore()
	r := rigOn(t, st, nil)
	r.bridge.set(sailing(somewhere, start, 0, 6))
	ear := r.listen("", nil)
	r.turn()
	st.breakIt(true)
	var p Problem
	resp := r.do("POST", api+"/marks", map[string]any{"id": newID(), "at": start}, &p)
	if resp.StatusCode != http.StatusServiceUnavailable || p.Title != "Not saved: keep it on the phone" || resp.Header.Get("Retry-After") == "" {
		t.Errorf("POST = %d %+v, want 503, not saved", resp.StatusCode, p)
	}
	r.clock.add(time.Second)
	r.turn()
	if m := ear.wait("problem", nil); m["code"] != "not-saved" || m["over"] == true {
		t.Errorf("problem to all = %v", m)
	}
	r.clock.add(time.Second)
	r.turn()
	if m := ear.wait("steer", nil); m["range_m"] == nil {
		t.Errorf("steer = %v, want guidance from memory", m)
	}
	if resp := r.do("GET", "/readyz", nil, nil); resp.StatusCode != 503 {
		t.Errorf("readyz = %d, want 503", resp.StatusCode)
	}
	late := r.listen("", nil)
	if m := late.wait("problem", nil); m["code"] != "not-saved" {
		t.Errorf("problem to one who comes later = %v", m)
	}
	st.breakIt(false)
	r.turn()
	if m := ear.wait("problem", nil); m["over"] != true {
		t.Errorf("problem to all = %v, want over", m)
	}
	if resp := r.do("GET", "/readyz", nil, nil); resp.StatusCode != 200 {
		t.Errorf("readyz = %d, want 200", resp.StatusCode)
	}
}

func TestPhonesSayWhereTheyAre(t *testing.T) {
	r := rigOn(t, realStore(t), func(c *Config) { c.OpenPairing = false })
	a := r.pair(gate.Watch, "Anna")
	ear := r.listen("", bearer(a.Token))
	for i := range 3 {
		ear.say(map[string]any{"t": "fix", "at": start.Add(time.Duration(i) * time.Second), "position": somewhere, "error_m": 4, "sog_kn": 6, "cog_deg": 360})
	}
	ear.say(map[string]any{"t": "fix", "at": start, "position": map[string]any{"lat": 99, "lon": 0}})
	if m := ear.wait("problem", nil); m["field"] != "position" {
		t.Errorf("problem = %v, want one about position", m)
	}
	ear.say(map[string]any{"t": "fix", "at": start, "position": somewhere, "sog_kn": 999})
	if m := ear.wait("problem", nil); m["field"] != "sog_kn" {
		t.Errorf("problem = %v, want one about sog_kn", m)
	}
	list := r.phones.list()
	if len(list) != 1 || list[0].Name != "Anna" || list[0].CogDeg.Or(1) != 0 {
		t.Errorf("phones = %+v, want Anna's last word", list)
	}
	r.keeper.flush()
	fixes, err := r.store.Track(a.Device.ID, start, start.Add(time.Minute))
	if err != nil || len(fixes) != 3 {
		t.Errorf("her track has %d fixes (%v), want 3", len(fixes), err)
	}
}
