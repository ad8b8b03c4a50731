package feed

import (
	"context"
	"testing"

	"wakeback/drift/nav"
)

func beaconUpdate(b Beacon) Update { return Update{Kind: UpdateBeacon, Beacon: nav.Some(b)} }

// waiting takes all out of a queue that nobody reads.
func waiting(q *queue) (all []Update) {
	for u, ok := q.take(); ok; u, ok = q.take() {
		all = append(all, u)
	}
	return all
}

// With a reader that is behind, no flood of other beacons, tests or fixes
// takes away the alarm that waits.
func TestFloodDoesNotBuryAnAlarm(t *testing.T) {
	q := newQueue()
	q.put(beaconUpdate(Beacon{MMSI: 972000001}))
	for i := range 10 * maxBeacons {
		q.put(beaconUpdate(Beacon{MMSI: 972100000 + uint32(i)}))
		q.put(beaconUpdate(Beacon{MMSI: 972200000 + uint32(i), Test: true}))
		q.put(Update{Kind: UpdateFix})
	}
	all := waiting(q)
	if len(all) != maxBeacons+maxFixes {
		t.Errorf("%d updates wait", len(all))
	}
	if b, _ := all[0].Beacon.Get(); b.MMSI != 972000001 {
		t.Errorf("first is %+v", all[0])
	}
}

// An alarm finds room among tests, however many there are.
func TestAlarmDisplacesTest(t *testing.T) {
	q := newQueue()
	for i := range maxBeacons {
		q.put(beaconUpdate(Beacon{MMSI: 972200000 + uint32(i), Test: true}))
	}
	q.put(beaconUpdate(Beacon{MMSI: 972000001}))
	found := false
	for _, u := range waiting(q) {
		b, _ := u.Beacon.Get()
		found = found || b.MMSI == 972000001 && !b.Test
	}
	if !found || q.refused != 1 {
		t.Errorf("found %t, %d refused", found, q.refused)
	}
}

// Of one beacon the newest report waits, with the position of the one before
// when it has none; a test of the same device does not take its place.
func TestNewestReportWaits(t *testing.T) {
	q := newQueue()
	at := nav.PositionFromDegrees(50.25, -4.125)
	q.put(beaconUpdate(Beacon{MMSI: 972000001, Position: nav.Some(here)}))
	q.put(beaconUpdate(Beacon{MMSI: 972000001, Position: nav.Some(at)}))
	q.put(beaconUpdate(Beacon{MMSI: 972000001})) // its text message
	q.put(beaconUpdate(Beacon{MMSI: 972000001, Test: true}))
	all := waiting(q)
	if len(all) != 2 {
		t.Fatalf("%d wait", len(all))
	}
	if b, _ := all[0].Beacon.Get(); b.Test || b.Position.Or(here) != at {
		t.Errorf("first is %+v", b)
	}
	if b, _ := all[1].Beacon.Get(); !b.Test {
		t.Errorf("second is %+v", b)
	}
}

// Two emitters of an on-board system that knows no identity are two.
func TestEmittersAreToldApart(t *testing.T) {
	q := newQueue()
	q.put(beaconUpdate(Beacon{Emitter: "001A4"}))
	q.put(beaconUpdate(Beacon{Emitter: "001A5"}))
	if all := waiting(q); len(all) != 2 {
		t.Errorf("%d wait", len(all))
	}
}

func TestPumpEndsAndCloses(t *testing.T) {
	q := newQueue()
	ctx, cancel := context.WithCancel(t.Context())
	done := make(chan struct{})
	go func() { q.pump(ctx); close(done) }()
	q.put(Update{Kind: UpdateFix})
	if u := <-q.out; u.Kind != UpdateFix {
		t.Errorf("got %+v", u)
	}
	q.put(Update{Kind: UpdateFix}) // nobody takes this one
	cancel()
	<-done
	for range q.out {
	}
}
