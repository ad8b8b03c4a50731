package advice

import (
	"cmp"
	"slices"
	"time"

	"wakeback/drift/nav"
	"wakeback/search/incident"
)

// Own is the own vessel as far as it is known: from its instruments, or from
// the phone that asks.
type Own struct {
	Fix    nav.Opt[nav.Fix]
	Source incident.PositionSource // vessel, phone or dr
	// Heading is where the bow points; absent when no compass tells.
	Heading nav.Opt[nav.TrueDeg]
	// HeadingAt is when that was so.
	HeadingAt time.Time
	// StwKn is the speed through the water.
	StwKn nav.Opt[float64]
}

// Input is what advice is asked about.
type Input struct {
	Now   time.Time
	State incident.State
	Own   Own
	// Person is whom to steer for; absent means the first who is not aboard.
	Person nav.Opt[incident.PersonNo]
}

// Choose returns the incident a screen shows when nobody chose one: the newest
// that is live, real before drill.
func Choose(states []incident.State) (incident.State, bool) {
	live := slices.DeleteFunc(slices.Clone(states), func(s incident.State) bool { return !s.Live() })
	if len(live) == 0 {
		return incident.State{}, false
	}
	return slices.MaxFunc(live, func(a, b incident.State) int {
		return cmp.Or(boolCompare(!a.Drill, !b.Drill), a.OpenedAt.Compare(b.OpenedAt))
	}), true
}

func boolCompare(a, b bool) int {
	switch {
	case a == b:
		return 0
	case a:
		return 1
	}
	return -1
}

// steeredFor is the person chosen, else the first who is not aboard, else the
// first of all.
func (in Input) steeredFor() (incident.PersonState, bool) {
	if no, ok := in.Person.Get(); ok {
		if p, ok := in.State.Person(no); ok {
			return p, true
		}
	}
	for _, p := range in.State.Persons {
		if p.Status != incident.IsAboard {
			return p, true
		}
	}
	if len(in.State.Persons) > 0 {
		return in.State.Persons[0], true
	}
	return incident.PersonState{}, false
}
