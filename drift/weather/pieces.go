package weather

import (
	"math"
	"slices"
	"sort"
	"time"

	"wakeback/drift/nav"
)

// Piece is a time in which one value held, or in which a forecast or table
// changed evenly; then the value is that of its middle, so its mean.
type Piece struct {
	From, To time.Time
	Value
}

// Duration is the length of the piece.
func (p Piece) Duration() time.Duration { return p.To.Sub(p.From) }

// guideStep is the longest piece made of something that changes. Our choice,
// because a tide turns by about 180 degrees in 6 h, so by 7.5 degrees in this.
const guideStep = 15 * time.Minute

// Pieces cuts the time into pieces without gaps, in order. There are none when
// nothing is known or to is not after from.
func (h History) Pieces(from, to time.Time) []Piece {
	if len(h.all) == 0 || !to.After(from) {
		return nil
	}
	var out []Piece
	cuts := append(h.cuts(from, to), to)
	begin := from
	for _, end := range cuts {
		out = h.appendPieces(out, begin, end)
		begin = end
	}
	return out
}

// cuts are the moments within (from, to) at which another sample takes over,
// in order.
func (h History) cuts(from, to time.Time) []time.Time {
	var cuts []time.Time
	add := func(t time.Time) {
		if t.After(from) && t.Before(to) {
			cuts = append(cuts, t)
		}
	}
	// Only the sample that holds at from and those after it have a say.
	first := lastAt(h.obs, from)
	if first < 0 && len(h.obs) > 0 {
		add(h.obs[0].From.Add(-h.medium.Reach()))
	}
	for _, s := range h.obs[max(first, 0):max(lastAt(h.obs, to)+1, first, 0)] {
		add(s.From)
		if len(h.guide) > 0 {
			// One nanosecond on: at its end the observation still holds.
			add(s.End().Add(h.medium.Reach() + 1))
		}
	}
	for _, s := range h.guide[lastAt(h.guide, from)+1 : lastAt(h.guide, to)+1] {
		add(s.From)
	}
	sort.Slice(cuts, func(i, j int) bool { return cuts[i].Before(cuts[j]) })
	return slices.CompactFunc(cuts, time.Time.Equal)
}

// appendPieces adds one stretch within which no other sample takes over, in
// equal parts where the value changes; parts of the same sample are joined.
func (h History) appendPieces(out []Piece, begin, end time.Time) []Piece {
	length := end.Sub(begin)
	v := h.At(begin.Add(length / 2)).Or(Value{})
	if !v.Between {
		if n := len(out); n > 0 && !out[n-1].Between && compare(out[n-1].Sample, v.Sample) == 0 {
			begin = out[n-1].From
			out = out[:n-1]
			v = h.At(begin.Add(end.Sub(begin) / 2)).Or(v)
		}
		return append(out, Piece{begin, end, v})
	}
	n := int(math.Ceil(float64(length) / float64(guideStep)))
	for i := range n {
		a := begin.Add(length * time.Duration(i) / time.Duration(n))
		b := begin.Add(length * time.Duration(i+1) / time.Duration(n))
		out = append(out, Piece{a, b, h.At(a.Add(b.Sub(a) / 2)).Or(v)})
	}
	return out
}

// Average is the mean over a time.
type Average struct {
	Velocity nav.Velocity
	// SDMs is the standard deviation of each component of the mean, if the
	// error stays the same all through: the cautious case.
	SDMs float64
}

// Mean is the mean from one moment to another; of one moment, or backwards in
// time, it is the value at from. It is absent when nothing is known.
func (h History) Mean(from, to time.Time) nav.Opt[Average] {
	v, ok := h.At(from).Get()
	if !ok {
		return nav.None[Average]()
	}
	if !to.After(from) {
		return nav.Some(Average{v.Velocity, v.SDMs})
	}
	var sum Average
	whole := to.Sub(from).Seconds()
	for _, p := range h.Pieces(from, to) {
		share := p.Duration().Seconds() / whole
		sum.Velocity = sum.Velocity.Add(p.Velocity.Scale(share))
		sum.SDMs += p.SDMs * share
	}
	return nav.Some(sum)
}
