package store

import (
	"cmp"
	"maps"
	"slices"

	"wakeback/search/incident"
)

// chainOf is what the store holds of one device.
type chainOf struct {
	first map[uint64]int // device number -> place of the event that came first
	forks []int          // places of events whose device number was taken
	last  uint64
}

func (c *chainOf) add(n uint64, place int) {
	if _, taken := c.first[n]; taken {
		c.forks = append(c.forks, place)
		return
	}
	c.first[n] = place
	c.last = max(c.last, n)
}

// ChainEnd is the number and the hash of a device's newest event; 0 and ""
// when it has none.
func (s *Store) ChainEnd(device incident.DeviceID) (uint64, string, error) {
	s.read.RLock()
	defer s.read.RUnlock()
	c := s.chains[device]
	if c == nil {
		return 0, "", nil
	}
	return c.last, s.events[c.first[c.last]].Hash, nil
}

// FindingKind says what does not fit.
type FindingKind string

// The findings.
const (
	// Gap: the device's events From to To have not come. It can be asked for them.
	Gap FindingKind = "gap"
	// Fork: the device's number From was used for another event before Event, as
	// by a phone that was set back to an older state.
	Fork FindingKind = "fork"
	// Broken: the hash that Event gives for the one before it is not that of
	// the stored one.
	Broken FindingKind = "broken"
)

// Finding is a hole or a contradiction in the chain of a device: something
// was lost, or changed behind the device's back. It is never a reason to
// refuse an event.
type Finding struct {
	Kind     FindingKind
	Device   incident.DeviceID
	From, To uint64           // device numbers
	Event    incident.EventID // "" for a gap
}

// Findings are read off what is stored: a gap that was filled later is none.
func (s *Store) Findings() []Finding {
	s.read.RLock()
	defer s.read.RUnlock()
	var out []Finding
	for device, c := range s.chains {
		out = append(out, s.findingsOf(device, c)...)
	}
	slices.SortFunc(out, func(a, b Finding) int {
		return cmp.Or(cmp.Compare(a.Device, b.Device), cmp.Compare(a.From, b.From), cmp.Compare(a.Kind, b.Kind), cmp.Compare(a.Event, b.Event))
	})
	return out
}

func (s *Store) findingsOf(device incident.DeviceID, c *chainOf) (out []Finding) {
	for _, i := range c.forks {
		e := s.events[i]
		out = append(out, Finding{Fork, device, e.DeviceSeq, e.DeviceSeq, e.ID})
	}
	before, prevHash := uint64(0), ""
	for _, n := range slices.Sorted(maps.Keys(c.first)) {
		e := s.events[c.first[n]]
		switch {
		case n > before+1:
			out = append(out, Finding{Gap, device, before + 1, n - 1, ""})
		case e.PrevHash != prevHash:
			out = append(out, Finding{Broken, device, n, n, e.ID})
		}
		before, prevHash = n, e.Hash
	}
	return out
}
