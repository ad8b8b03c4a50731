package feed

import (
	"context"
	"sync"

	"wakeback/drift/nav"
)

// queue holds updates for a reader that may be behind. It never waits and its
// room is bounded:
//
//   - of each beacon the newest report waits, a test apart from an alarm, so that
//     a test never takes the place of an alarm. Beacons go before fixes, in the
//     order in which each began to wait.
//   - of the fixes the newest maxFixes wait.
//
// However many stations a flood invents, a beacon that waits keeps its place. A
// beacon that finds no room is told by its next report: devices repeat theirs
// several times a minute.
type queue struct {
	out  chan Update
	wake chan struct{} // holds a token when there is something to tell

	mu      sync.Mutex // guards what follows
	fixes   []Update
	order   []beaconKey
	beacons map[beaconKey]Update
	refused uint64 // beacon reports that found no room
}

// beaconKey tells beacons apart, and tests from alarms.
type beaconKey struct {
	mmsi    uint32
	emitter string
	test    bool
}

// Our choice: more fixes than a minute has at 4 Hz, and more beacons than any
// vessel carries people.
const (
	maxFixes   = 256
	maxBeacons = 256
)

func newQueue() *queue {
	return &queue{out: make(chan Update), wake: make(chan struct{}, 1), beacons: make(map[beaconKey]Update)}
}

// put takes an update in; it never waits.
func (q *queue) put(u Update) {
	q.mu.Lock()
	if b, ok := u.Beacon.Get(); ok {
		q.putBeacon(beaconKey{b.MMSI, b.Emitter, b.Test}, u)
	} else {
		if len(q.fixes) >= maxFixes {
			q.fixes = q.fixes[1:]
		}
		q.fixes = append(q.fixes, u)
	}
	q.mu.Unlock()
	select {
	case q.wake <- struct{}{}:
	default:
	}
}

func (q *queue) putBeacon(k beaconKey, u Update) {
	_, waits := q.beacons[k]
	if !waits && len(q.order) >= maxBeacons && !(!k.test && q.dropTest()) {
		q.refused++
		return
	}
	if !waits {
		q.order = append(q.order, k)
	} else if u.Beacon.Or(Beacon{}).Position == (nav.Opt[nav.Position]{}) {
		u = withPosition(u, q.beacons[k])
	}
	q.beacons[k] = u
}

// withPosition keeps the position of the report before for one that has none:
// devices send their text between their positions.
func withPosition(u, before Update) Update {
	b, old := u.Beacon.Or(Beacon{}), before.Beacon.Or(Beacon{})
	b.Position, b.SogKn, b.CogTrue = old.Position, old.SogKn, old.CogTrue
	u.Beacon = nav.Some(b)
	return u
}

// dropTest makes room for an alarm by dropping the test that began to wait
// last; it reports whether there was one.
func (q *queue) dropTest() bool {
	for i := len(q.order) - 1; i >= 0; i-- {
		if k := q.order[i]; k.test {
			delete(q.beacons, k)
			q.order = append(q.order[:i], q.order[i+1:]...)
			q.refused++
			return true
		}
	}
	return false
}

func (q *queue) take() (Update, bool) {
	q.mu.Lock()
	defer q.mu.Unlock()
	if len(q.order) > 0 {
		k := q.order[0]
		q.order = q.order[1:]
		u := q.beacons[k]
		delete(q.beacons, k)
		return u, true
	}
	if len(q.fixes) > 0 {
		u := q.fixes[0]
		q.fixes = q.fixes[1:]
		return u, true
	}
	return Update{}, false
}

// pump hands updates out until ctx ends, and closes the channel then.
func (q *queue) pump(ctx context.Context) {
	defer close(q.out)
	for {
		u, ok := q.take()
		if !ok {
			select {
			case <-ctx.Done():
				return
			case <-q.wake:
			}
			continue
		}
		select {
		case <-ctx.Done():
			return
		case q.out <- u:
		}
	}
}
