package incident

import (
	"cmp"
	"slices"
	"sort"
	"time"
)

// Log is a set of events, of any number of incidents. Adding an event twice
// changes nothing. The zero Log is empty and ready. It is not safe for use by
// several goroutines at once.
type Log struct {
	byID    map[EventID]*entry
	sorted  []*entry
	ordered bool
}

// entry is an event with its body read.
type entry struct {
	Event
	body any // nil when the kind is unknown or the body could not be read
}

func (e *entry) said() Said {
	return Said{Event: e.ID, At: e.At, By: e.By, Device: e.Device}
}

// compareEntries is the one order of the log: when it happened, then by
// device and number, then by id. Nothing in it depends on arrival.
func compareEntries(a, b *entry) int {
	return cmp.Or(
		a.At.Compare(b.At),
		cmp.Compare(a.Device, b.Device),
		cmp.Compare(a.DeviceSeq, b.DeviceSeq),
		cmp.Compare(a.ID, b.ID),
	)
}

// Add puts events into the log and returns how many were new. Of two events
// of one id and different content the one with the lower hash counts, so that
// everyone who holds both agrees.
func (l *Log) Add(events ...Event) int {
	if l.byID == nil {
		l.byID = make(map[EventID]*entry, len(events))
	}
	added := 0
	for _, ev := range events {
		old, ok := l.byID[ev.ID]
		if ok && old.Hash <= ev.Hash {
			continue
		}
		body, err := ev.decode()
		if err != nil {
			body = nil
		}
		e := &entry{Event: ev, body: body}
		l.byID[ev.ID] = e
		if ok {
			l.sorted[slices.Index(l.sorted, old)] = e
			l.ordered = false
			continue
		}
		if n := len(l.sorted); n > 0 && compareEntries(l.sorted[n-1], e) > 0 {
			l.ordered = false
		} else if n == 0 {
			l.ordered = true
		}
		l.sorted = append(l.sorted, e)
		added++
	}
	return added
}

// Len is the number of events.
func (l *Log) Len() int { return len(l.sorted) }

// Has reports whether an event is in the log.
func (l *Log) Has(id EventID) bool { _, ok := l.byID[id]; return ok }

// Events returns the events in the order of the log.
func (l *Log) Events() []Event {
	out := make([]Event, 0, len(l.sorted))
	for _, e := range l.inOrder() {
		out = append(out, e.Event)
	}
	return out
}

func (l *Log) inOrder() []*entry {
	if !l.ordered {
		sort.Slice(l.sorted, func(i, j int) bool { return compareEntries(l.sorted[i], l.sorted[j]) < 0 })
		l.ordered = true
	}
	return l.sorted
}

// States folds the log: one state for every incident that was not joined to
// another, in order of their opening.
func (l *Log) States() []State {
	entries := l.inOrder()
	root := joins(entries)
	undone := undoneEvents(entries)
	folds := make(map[IncidentID]*folder)
	var order []IncidentID
	for _, e := range entries {
		id := root.of(e.Incident)
		f, ok := folds[id]
		if !ok {
			f = newFolder(id)
			folds[id] = f
			order = append(order, id)
		}
		f.fold(e, undone[e.ID])
	}
	out := make([]State, 0, len(order))
	for _, id := range order {
		out = append(out, folds[id].finish())
	}
	return out
}

// Fold is [Log.States] of a log with these events. Its result does not depend
// on their order, on repetition or on how they are batched.
func Fold(events []Event) []State {
	var l Log
	l.Add(events...)
	return l.States()
}

// OpenAt returns the incident that a new mark joins: the newest that is live
// and of the same sort (drill or not). A test never takes a real mark.
func OpenAt(states []State, drill bool) (IncidentID, bool) {
	var id IncidentID
	var at time.Time
	for _, s := range states {
		if s.Live() && s.Drill == drill && (id == "" || s.OpenedAt.After(at)) {
			id, at = s.ID, s.OpenedAt
		}
	}
	return id, id != ""
}

// joined is a union of incidents.
type joined map[IncidentID]IncidentID

func (j joined) of(id IncidentID) IncidentID {
	for {
		next, ok := j[id]
		if !ok {
			return id
		}
		id = next
	}
}

// joins reads the joined events. Each unites two incidents; the name of the
// whole is that of the incident whose first event is the earliest, whichever
// was said to join which, so that phones that each joined the other way round
// agree, and so that a circle cannot arise.
func joins(entries []*entry) joined {
	firstAt := make(map[IncidentID]int)
	for i, e := range entries {
		if _, ok := firstAt[e.Incident]; !ok {
			firstAt[e.Incident] = i
		}
	}
	j := make(joined)
	for _, e := range entries {
		body, ok := e.body.(*Joined)
		if !ok {
			continue
		}
		a, b := j.of(e.Incident), j.of(body.Into)
		if a == b {
			continue
		}
		if later(b, a, firstAt) {
			a, b = b, a
		}
		j[a] = b
	}
	return j
}

// later reports whether incident a began after b. One of which no event is
// here yet counts as the later, and of two such the greater id.
func later(a, b IncidentID, firstAt map[IncidentID]int) bool {
	ia, okA := firstAt[a]
	ib, okB := firstAt[b]
	if okA != okB {
		return okB
	}
	if !okA {
		return a > b
	}
	return ia > ib
}

// undoneEvents finds which events were taken back. An event can only be taken
// back by a later one, so going from the newest to the oldest each undoing is
// known to stand or not before it is counted.
func undoneEvents(entries []*entry) map[EventID]bool {
	place := make(map[EventID]int)
	var undoings []int
	for i, e := range entries {
		if _, ok := e.body.(*Undone); ok {
			undoings = append(undoings, i)
		}
	}
	if len(undoings) == 0 {
		return nil
	}
	for i, e := range entries {
		place[e.ID] = i
	}
	undone := make(map[EventID]bool)
	for _, i := range slices.Backward(undoings) {
		e := entries[i]
		if undone[e.ID] {
			continue
		}
		target := e.body.(*Undone).Event
		at, ok := place[target]
		if ok && at < i && canUndo(entries[at]) {
			undone[target] = true
		}
	}
	return undone
}

// canUndo: a mark is dismissed with a reason and never vanishes, and what was
// said or ordered on the radio was said.
func canUndo(e *entry) bool {
	switch e.Kind {
	case KindMarked, KindMarkPlaced, KindBeacon, KindOrder, KindSuspended, KindCallMade, KindCallAnswered, KindJoined:
		return false
	}
	return true
}
