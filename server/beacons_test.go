package server

import (
	"encoding/json"
	"testing"
	"time"

	"wakeback/drift/nav"
	"wakeback/search/incident"
	"wakeback/server/feed"
)

// The identities are of the form for man-overboard devices (ITU-R M.585-9,
// annex 2: 972, manufacturer, serial number).
const (
	beaconA = 972123456
	beaconB = 972654321
)

// hear lets the watchman take a report.
func (r *rig) hear(b feed.Beacon) {
	r.t.Helper()
	b.At = r.clock.now()
	if err := r.guard.beacon(b); err != nil {
		r.t.Fatal(err)
	}
}

func TestBeaconRaisesAMarkAndMovesIt(t *testing.T) {
	r := rigOn(t, realStore(t), nil)
	r.bridge.set(sailing(somewhere, start, 0, 6))
	ear := r.listen("", nil)
	at := nav.Some(nav.PositionFromDegrees(54.101, 7.901))
	r.hear(feed.Beacon{MMSI: beaconA, Position: at})
	m := r.only().Marks[0]
	place, _ := m.Place.Get()
	if m.Mmsi != beaconA || place.Source != incident.FromBeacon || m.By != "beacon 972123456" {
		t.Errorf("mark = %+v, want one by beacon 972123456 at its position", m)
	}
	if e := ear.wait("event", nil)["event"].(map[string]any); e["kind"] != "marked" {
		t.Errorf("streamed %v, want the mark", e["kind"])
	}
	// Reports every two seconds for a minute: one in ten seconds is written.
	for range 30 {
		r.clock.add(2 * time.Second)
		r.hear(feed.Beacon{MMSI: beaconA, Position: at})
	}
	st := r.only()
	if st.Events != 1+6 || len(st.Marks) != 1 {
		t.Errorf("%d events and %d marks, want 7 and 1", st.Events, len(st.Marks))
	}
	r.turn()
	if basis := ear.wait("steer", nil)["datum"].(map[string]any)["basis"]; basis != "beacon" {
		t.Errorf("datum starts from %v, want the beacon", basis)
	}
}

func TestBeaconOfTheOneWhoWasMarked(t *testing.T) {
	r := rigOn(t, realStore(t), nil)
	r.bridge.set(sailing(somewhere, start, 0, 6))
	r.markNow(nil)
	r.clock.add(15 * time.Second)
	r.hear(feed.Beacon{MMSI: beaconA}) // has no position yet
	r.hear(feed.Beacon{MMSI: beaconB, Position: nav.Some(somewhere)})
	st := r.only()
	if len(st.Marks) != 3 || st.Marks[1].Person != 1 || st.Marks[2].Person != 2 {
		t.Fatalf("marks = %+v, want the first beacon for person 1 and the other for person 2", st.Marks)
	}
	if p, _ := st.Marks[1].Place.Get(); p.Source != incident.FromVessel {
		t.Errorf("a beacon without a position is placed by %q, want the vessel", p.Source)
	}
}

func TestBeaconTestIsNoAlarm(t *testing.T) {
	r := rigOn(t, realStore(t), nil)
	for range 5 {
		r.hear(feed.Beacon{MMSI: beaconA, Position: nav.Some(somewhere), Test: true})
		r.clock.add(time.Minute)
	}
	st := r.only()
	if !st.Test || st.Live() || st.Events != 1 {
		t.Errorf("test %t, live %t, %d events; want one event, a test, not live", st.Test, st.Live(), st.Events)
	}
	// The real thing after a test is a real thing.
	r.hear(feed.Beacon{MMSI: beaconA, Position: nav.Some(somewhere)})
	if n := len(r.book.live()); n != 1 {
		t.Errorf("%d live incidents, want 1", n)
	}
}

func TestBeaconAfterStandDown(t *testing.T) {
	r := rigOn(t, realStore(t), nil)
	r.hear(feed.Beacon{MMSI: beaconA, Position: nav.Some(somewhere)})
	r.clock.add(20 * time.Minute)
	r.hear(feed.Beacon{MMSI: beaconA, Position: nav.Some(somewhere)})
	p := newPhone()
	id := r.only().ID
	say := func(kind incident.Kind, body any) {
		t.Helper()
		if resp := r.do("POST", eventsPath(id), batchOf(p.write(t, id, r.clock.now(), kind, body)), nil); resp.StatusCode != 200 {
			t.Fatal(resp.StatusCode)
		}
	}
	say(incident.KindAboard, incident.Aboard{Condition: "well"})
	for range 5 {
		r.clock.add(30 * time.Second)
		r.hear(feed.Beacon{MMSI: beaconA, Position: nav.Some(somewhere)})
	}
	say(incident.KindStoodDown, incident.StoodDown{Reason: "aboard"})
	for range 60 { // it goes on transmitting from a locker, for an hour
		r.clock.add(time.Minute)
		r.hear(feed.Beacon{MMSI: beaconA, Position: nav.Some(somewhere)})
	}
	if st := r.only(); st.Live() {
		t.Error("a beacon that was never switched off opened the incident again")
	}
	r.clock.add(beaconSilence)
	r.hear(feed.Beacon{MMSI: beaconA, Position: nav.Some(somewhere)})
	if n := len(r.book.live()); n != 1 {
		t.Errorf("after a silence the beacon calls again: %d live incidents, want 1", n)
	}
}

func TestFloodOfBeaconsIsHeldBack(t *testing.T) {
	r := rigOn(t, realStore(t), nil)
	real := r.markNow(map[string]any{"position": somewhere})
	for i := range uint32(50) {
		r.hear(feed.Beacon{MMSI: 972000000 + i, Position: nav.Some(somewhere)})
	}
	st := r.only()
	if len(st.Marks) != 1+maxBeacons {
		t.Errorf("%d marks, want the real one and %d", len(st.Marks), maxBeacons)
	}
	if w := st.Persons[0].WorkingMark.Or(""); w != real.Event.ID {
		t.Errorf("steering by %s, want the real mark", w)
	}
}

func TestOtherBeaconsRaiseNothing(t *testing.T) {
	r := rigOn(t, realStore(t), nil)
	for _, mmsi := range []uint32{970123456, 974123456, 211234560} {
		r.hear(feed.Beacon{MMSI: mmsi, Position: nav.Some(somewhere)})
	}
	if n := len(r.book.states()); n != 0 {
		t.Errorf("%d incidents, want none", n)
	}
}

func TestMarkInThePastLiesOnTheTrack(t *testing.T) {
	r := rigOn(t, realStore(t), nil)
	sail := sailing(somewhere, start, 90, 8)
	r.bridge.set(sail)
	for range 60 {
		r.turn()
		r.clock.add(time.Second)
	}
	at := r.clock.now().Add(-25 * time.Second)
	a := r.markNow(map[string]any{"at": at})
	var body incident.Marked
	if err := json.Unmarshal(a.Event.Body, &body); err != nil {
		t.Fatal(err)
	}
	want := feed.Fresh(sail(at).Position).Or(somewhere)
	if body.Source != incident.FromTrack || nav.Inverse(body.Position.Or(somewhere), want).RangeM > 0.1 {
		t.Errorf("marked at %v (%s), want %v on the track", body.Position, body.Source, want)
	}
	var track struct{ Points []trackPoint }
	r.do("GET", api+"/track?from=2026-06-01T02:14:00Z&to=2026-06-01T02:16:00Z", nil, &track)
	if len(track.Points) < 59 {
		t.Errorf("track has %d points, want one a second", len(track.Points))
	}
}

func TestOwnSystemWithoutIdentity(t *testing.T) {
	r := rigOn(t, realStore(t), nil)
	r.bridge.set(sailing(somewhere, start, 0, 6))
	for range 10 { // the sentence is repeated
		r.hear(feed.Beacon{Position: nav.Some(somewhere)})
		r.clock.add(20 * time.Second)
	}
	st := r.only()
	if len(st.Marks) != 1 || st.Events != 1 || st.Marks[0].By != ownSystem {
		t.Errorf("%d marks in %d events by %q, want one by the overboard system", len(st.Marks), st.Events, st.Marks[0].By)
	}
}
