package server

import (
	"cmp"
	"encoding/json"
	"slices"
	"sync"

	"wakeback/search/incident"
)

// book holds the incidents in memory. It keeps incidents that were joined
// together apart from all others, so that a new event means folding one
// incident and not the whole log.
type book struct {
	mu     sync.Mutex // guards all below; held for a fold at most
	groups map[incident.IncidentID]*group
}

// group is an incident with those that were joined to it.
type group struct {
	log    incident.Log
	states []incident.State // of log; nil when it has to be folded
}

func newBook() *book { return &book{groups: make(map[incident.IncidentID]*group)} }

// add counts events in.
func (b *book) add(events ...incident.Event) {
	b.mu.Lock()
	defer b.mu.Unlock()
	for _, e := range events {
		g := b.group(e.Incident)
		if into, ok := joinOf(e); ok {
			g = b.unite(g, b.group(into))
		}
		if g.log.Add(e) > 0 {
			g.states = nil
		}
	}
}

// group is that of an incident; an unknown one gets its own. Needs mu.
func (b *book) group(id incident.IncidentID) *group {
	g, ok := b.groups[id]
	if !ok {
		g = &group{}
		b.groups[id] = g
	}
	return g
}

// unite puts b's events into a. Needs mu.
func (b *book) unite(into, from *group) *group {
	if into == from {
		return into
	}
	if into.log.Len() < from.log.Len() {
		into, from = from, into
	}
	into.log.Add(from.log.Events()...)
	into.states = nil
	for id, g := range b.groups {
		if g == from {
			b.groups[id] = into
		}
	}
	return into
}

func joinOf(e incident.Event) (incident.IncidentID, bool) {
	if e.Kind != incident.KindJoined {
		return "", false
	}
	var body incident.Joined
	if json.Unmarshal(e.Body, &body) != nil || body.Into == "" {
		return "", false
	}
	return body.Into, true
}

func (g *group) fold() []incident.State {
	if g.states == nil {
		g.states = g.log.States()
	}
	return g.states
}

// states are all incidents, newest first. The caller must not change what
// they hold.
func (b *book) states() []incident.State {
	b.mu.Lock()
	defer b.mu.Unlock()
	var all []incident.State
	seen := make(map[*group]bool, len(b.groups))
	for _, g := range b.groups {
		if !seen[g] {
			seen[g] = true
			all = append(all, g.fold()...)
		}
	}
	slices.SortFunc(all, func(x, y incident.State) int {
		return cmp.Or(y.OpenedAt.Compare(x.OpenedAt), cmp.Compare(x.ID, y.ID))
	})
	return all
}

// state is that of an incident, or of the one it was joined to.
func (b *book) state(id incident.IncidentID) (incident.State, bool) {
	b.mu.Lock()
	defer b.mu.Unlock()
	g, ok := b.groups[id]
	if !ok {
		return incident.State{}, false
	}
	for _, s := range g.fold() {
		if s.ID == id || slices.Contains(s.Joined, id) {
			return s, true
		}
	}
	return incident.State{}, false
}

// knows reports whether any event of an incident is here.
func (b *book) knows(id incident.IncidentID) bool {
	_, ok := b.state(id)
	return ok
}

// events are those of an incident and of what was joined to it that are on
// disk, after a number, in order of the numbers.
func (b *book) events(id incident.IncidentID, after incident.Seq) []incident.Event {
	b.mu.Lock()
	defer b.mu.Unlock()
	g, ok := b.groups[id]
	if !ok {
		return nil
	}
	list := slices.DeleteFunc(g.log.Events(), func(e incident.Event) bool { return e.Seq <= after })
	slices.SortFunc(list, func(x, y incident.Event) int { return cmp.Compare(x.Seq, y.Seq) })
	return list
}

// live are the incidents in which someone still has to be found or brought
// aboard.
func (b *book) live() []incident.State {
	return slices.DeleteFunc(b.states(), func(s incident.State) bool { return !s.Live() })
}
