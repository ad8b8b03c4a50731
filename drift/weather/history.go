package weather

import (
	"errors"
	"fmt"
	"slices"
	"sort"
	"time"

	"wakeback/drift/nav"
)

// History is what is known of the wind, or of the current. The zero History is
// of neither and takes nothing: use [NewWinds] or [NewCurrents]. A copy is a
// snapshot: it stays as it is, and may be read, while samples are added to the
// original. Add to one of the two only.
type History struct {
	medium Medium
	all    []Sample // everything said, in order; like the others never changed in place, only appended to
	obs    []Sample // the observations that count, one of a moment
	guide  []Sample // forecasts and tables that count, one of a moment
}

// NewWinds makes a history of winds; the order of the samples does not matter.
func NewWinds(samples ...Sample) (History, error) { return newHistory(Wind, samples) }

// NewCurrents makes a history of currents.
func NewCurrents(samples ...Sample) (History, error) { return newHistory(Current, samples) }

func newHistory(m Medium, samples []Sample) (History, error) {
	h := History{medium: m}
	for i, s := range samples {
		if err := s.Validate(m); err != nil {
			return History{medium: m}, fmt.Errorf("%v %d: %w", m, i+1, err)
		}
	}
	h.set(slices.Clone(samples))
	return h, nil
}

// errMedium is a programmer's error made visible.
var errMedium = errors.New("history of neither wind nor current: make it with NewWinds or NewCurrents")

// Add puts a sample in its place in time; nothing is replaced. The error is a
// [*FieldError], and leaves the history as it was.
func (h *History) Add(s Sample) error {
	if h.medium == 0 {
		return errMedium
	}
	if err := s.Validate(h.medium); err != nil {
		return fmt.Errorf("%v: %w", h.medium, err)
	}
	if n := len(h.all); n > 0 && !s.From.After(h.all[n-1].From) {
		h.set(append(slices.Clone(h.all), s))
		return nil
	}
	h.all = append(h.all, s)
	h.count(s)
	return nil
}

func (h *History) set(all []Sample) {
	sort.SliceStable(all, func(i, j int) bool { return compare(all[i], all[j]) < 0 })
	all = slices.CompactFunc(all, func(a, b Sample) bool { return compare(a, b) == 0 })
	h.all, h.obs, h.guide = all, nil, nil
	for _, s := range all {
		h.count(s)
	}
}

// count puts a sample, not earlier than all others, among those that count.
func (h *History) count(s Sample) {
	if s.Source.Guide() {
		h.guide = lastOfMoment(h.guide, s)
	} else {
		h.obs = lastOfMoment(h.obs, s)
	}
}

// lastOfMoment appends s, which comes after all of list, or replaces the one of
// the same moment; that only happens while a list is made anew.
func lastOfMoment(list []Sample, s Sample) []Sample {
	if n := len(list); n > 0 && list[n-1].From.Equal(s.From) {
		list[n-1] = s
		return list
	}
	return append(list, s)
}

// Medium is whether this is wind or current.
func (h History) Medium() Medium { return h.medium }

// Len is how many samples were given.
func (h History) Len() int { return len(h.all) }

// Samples are all samples in order of time, those that no longer count
// included.
func (h History) Samples() []Sample { return slices.Clone(h.all) }

// Value is what held at a moment.
type Value struct {
	Velocity nav.Velocity
	SDMs     float64       // standard deviation of each component
	Age      time.Duration // since Sample was measured; negative before it; zero between two of a table
	Sample   Sample        // what it comes from; between two, the earlier
	Between  bool          // interpolated between two of a forecast or table
}

// At is what held at a moment; absent when nothing is known at all.
func (h History) At(at time.Time) nav.Opt[Value] {
	if len(h.all) == 0 {
		return nav.None[Value]()
	}
	o, g := lastAt(h.obs, at), lastAt(h.guide, at)
	switch {
	case o >= 0 && (g < 0 || h.outranks(h.obs[o], g, at)):
		return nav.Some(h.held(h.obs[o], at))
	case o < 0 && h.firstReaches(at):
		return nav.Some(h.held(h.obs[0], at))
	case g < 0:
		return nav.Some(h.held(h.guide[0], at))
	}
	return nav.Some(h.guideAt(g, at))
}

// firstReaches reports whether at, before all observations, is the first one's:
// within its reach, or when the guide begins no earlier than it.
func (h History) firstReaches(at time.Time) bool {
	if len(h.obs) == 0 {
		return false
	}
	first := h.obs[0].From
	return len(h.guide) == 0 || !h.guide[0].From.Before(first) || first.Sub(at) <= h.medium.Reach()
}

// outranks reports whether an observation made before at counts more than the
// guide sample g: within its reach, or when the guide ended before it.
func (h History) outranks(s Sample, g int, at time.Time) bool {
	return at.Sub(s.End()) <= h.medium.Reach() || g+1 == len(h.guide) && s.End().After(h.guide[g].From)
}

// lastAt is the index of the last sample not later than at, or -1.
func lastAt(list []Sample, at time.Time) int {
	return sort.Search(len(list), func(i int) bool { return list[i].From.After(at) }) - 1
}

// sd is the standard deviation a sample has at its own time.
func (h History) sd(s Sample) float64 { return s.SDMs.Or(h.medium.DefaultSDMs(s.Source)) }

// held is a sample carried to another time.
func (h History) held(s Sample, at time.Time) Value {
	age := time.Duration(0)
	switch {
	case at.Before(s.From):
		age = at.Sub(s.From)
	case at.After(s.End()):
		age = at.Sub(s.End())
	}
	return Value{Velocity: s.Velocity, SDMs: h.medium.SDAt(h.sd(s), age), Age: age, Sample: s}
}

// guideAt interpolates between the guide sample i, not later than at, and the
// next one.
func (h History) guideAt(i int, at time.Time) Value {
	a := h.guide[i]
	if i+1 == len(h.guide) {
		return h.held(a, at)
	}
	b := h.guide[i+1]
	f := at.Sub(a.From).Seconds() / b.From.Sub(a.From).Seconds()
	return Value{
		Velocity: a.Velocity.Scale(1 - f).Add(b.Velocity.Scale(f)),
		SDMs:     h.sd(a)*(1-f) + h.sd(b)*f,
		Sample:   a, Between: true,
	}
}
