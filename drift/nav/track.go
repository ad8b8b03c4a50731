package nav

import (
	"slices"
	"sort"
	"time"
)

// Fix is where something was at one moment.
type Fix struct {
	At       time.Time
	Position Position
	SogKn    Opt[float64] // speed over the ground
	CogTrue  Opt[TrueDeg] // course over the ground
	ErrorM   Opt[float64] // radius that holds the true position in 95 of 100 cases, as its source states it
}

// Velocity is the motion over the ground, if speed and course are known. At a
// speed of zero the course does not matter.
func (f Fix) Velocity() Opt[Velocity] {
	sog, ok := f.SogKn.Get()
	if !ok {
		return None[Velocity]()
	}
	if sog == 0 {
		return Some(Velocity{})
	}
	cog, ok := f.CogTrue.Get()
	if !ok {
		return None[Velocity]()
	}
	return Some(Towards(cog, sog))
}

// Track is a sequence of fixes in order of time, no two of one instant. The
// zero Track is empty and ready.
//
// A copy of a Track is a snapshot: it stays as it is, and may be read, while
// fixes are added to the original or trimmed from it. Add to one of the two
// only.
type Track struct {
	fixes []Fix // never changed in place, only appended to
}

// NewTrack makes a track; the fixes may come in any order, and of several of
// one instant the last given stays. The slice is not kept.
func NewTrack(fixes []Fix) Track {
	sorted := slices.Clone(fixes)
	sort.SliceStable(sorted, func(i, j int) bool { return sorted[i].At.Before(sorted[j].At) })
	kept := sorted[:0]
	for i, f := range sorted {
		if i+1 == len(sorted) || !sorted[i+1].At.Equal(f.At) {
			kept = append(kept, f)
		}
	}
	return Track{kept}
}

// Add puts a fix in its place in time. A fix of an instant that is there
// already replaces it.
func (t *Track) Add(f Fix) {
	if n := len(t.fixes); n == 0 || f.At.After(t.fixes[n-1].At) {
		t.fixes = append(t.fixes, f)
		return
	}
	t.fixes = slices.Clone(t.fixes)
	i := t.after(f.At)
	if i > 0 && t.fixes[i-1].At.Equal(f.At) {
		t.fixes[i-1] = f
		return
	}
	t.fixes = slices.Insert(t.fixes, i, f)
}

// Trim drops the fixes before cut. Their memory goes with the next growth.
func (t *Track) Trim(cut time.Time) {
	i := sort.Search(len(t.fixes), func(i int) bool { return !t.fixes[i].At.Before(cut) })
	t.fixes = t.fixes[i:]
}

// after is the index of the first fix later than at.
func (t *Track) after(at time.Time) int {
	return sort.Search(len(t.fixes), func(i int) bool { return t.fixes[i].At.After(at) })
}

// Len is the number of fixes.
func (t Track) Len() int { return len(t.fixes) }

// Fixes returns a copy of the fixes in order.
func (t Track) Fixes() []Fix { return slices.Clone(t.fixes) }

// Last is the newest fix.
func (t Track) Last() Opt[Fix] {
	if len(t.fixes) == 0 {
		return None[Fix]()
	}
	return Some(t.fixes[len(t.fixes)-1])
}

// LastBefore is the newest fix not later than at.
func (t Track) LastBefore(at time.Time) Opt[Fix] {
	i := t.after(at)
	if i == 0 {
		return None[Fix]()
	}
	return Some(t.fixes[i-1])
}

// FirstAfter is the oldest fix later than at.
func (t Track) FirstAfter(at time.Time) Opt[Fix] {
	i := t.after(at)
	if i == len(t.fixes) {
		return None[Fix]()
	}
	return Some(t.fixes[i])
}

// At interpolates between the two fixes around at, along the geodesic between
// them at an even speed. It is absent before the first fix, after the last,
// and across a gap longer than maxGap. Speed and course are those of the
// earlier fix; the error is the larger of the two, as far as they are stated,
// and does not hold what the vessel may have done in between.
func (t Track) At(at time.Time, maxGap time.Duration) Opt[Fix] {
	i := t.after(at)
	if i == 0 {
		return None[Fix]()
	}
	a := t.fixes[i-1]
	if a.At.Equal(at) {
		return Some(a)
	}
	if i == len(t.fixes) {
		return None[Fix]()
	}
	b := t.fixes[i]
	gap := b.At.Sub(a.At)
	if gap > maxGap {
		return None[Fix]()
	}
	f := a
	f.At = at
	f.ErrorM = larger(a.ErrorM, b.ErrorM)
	frac := float64(at.Sub(a.At)) / float64(gap)
	f.Position = a.Position.Shift(NewPlane(a.Position).Offset(b.Position).Scale(frac))
	return Some(f)
}

// larger is the larger of two values that may be absent.
func larger(a, b Opt[float64]) Opt[float64] {
	x, ok := a.Get()
	if y, also := b.Get(); also && (!ok || y > x) {
		return b
	}
	return a
}

// Between returns the fixes from one moment to another, both included.
func (t Track) Between(from, to time.Time) []Fix {
	i := sort.Search(len(t.fixes), func(i int) bool { return !t.fixes[i].At.Before(from) })
	j := t.after(to)
	if i >= j {
		return nil
	}
	return slices.Clone(t.fixes[i:j])
}
