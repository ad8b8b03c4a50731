package pattern

import (
	"wakeback/drift/nav"
)

// Square is an expanding square from the datum: legs of d, d, 2d, 2d, 3d, 3d
// and so on, with right-angled turns (IAMSAR Manual vol. II, expanding square
// search, as quoted in a study text that follows it). Leg n has the length
// d*ceil(n/2); n legs together d*floor((n+1)²/4).
func Square(first nav.TrueDeg, spacingM float64, legs int, turns Turns) ([]Leg, error) {
	if err := firstOf(positive("the spacing", spacingM), count("the number of legs", legs)); err != nil {
		return nil, err
	}
	var w walk
	course := first
	for n := range legs {
		w.run(SearchLeg, course, spacingM*float64(n/2+1))
		course = course.Add(90 * float64(turns))
	}
	return w.done()
}

// Sector is a sector search: three triangles that meet at the datum, every
// leg of the radius and every turn 120 degrees; where one triangle ends at
// the datum the next begins on the same course. A second pass starts 30
// degrees further round, half-way between the legs of the first (IAMSAR Manual
// vol. II, sector search, as quoted in study texts that follow it). One pass
// is nine legs and nine radii long. Passes beyond the second repeat the two.
func Sector(first nav.TrueDeg, radiusM float64, passes int, turns Turns) ([]Leg, error) {
	if err := firstOf(positive("the radius", radiusM), count("the number of passes", passes)); err != nil {
		return nil, err
	}
	var w walk
	for pass := range passes {
		course := first.Add(30 * float64(turns) * float64(pass%2))
		for leg := range 9 {
			kind := SearchLeg
			if leg%3 == 1 {
				kind = CrossLeg
			}
			w.run(kind, course, radiusM)
			if leg%3 != 2 { // through the datum the course stays
				course = course.Add(120 * float64(turns))
			}
		}
		w.at = nav.Offset{} // nine legs end at the datum; rounding must not add up
	}
	return w.done()
}

// Sweep is a parallel sweep or a creeping line: search legs of one length on
// the course along and back, a spacing apart, with a cross leg between each
// two. The first leg begins at start; the next lie to the side given. A
// parallel sweep runs its legs along the long side of the area, a creeping
// line along the short one: the legs are found in the same way (National
// Search and Rescue Manual JP 3-50 vol. I, chapter 5).
func Sweep(start nav.Offset, along nav.TrueDeg, lengthM, spacingM float64, legs int, side Turns) ([]Leg, error) {
	err := firstOf(positive("the length", lengthM), positive("the spacing", spacingM), count("the number of legs", legs))
	if err != nil {
		return nil, err
	}
	w := walk{at: start}
	across := along.Add(90 * float64(side))
	for n := range legs {
		course := along
		if n%2 == 1 {
			course = along.Reciprocal()
		}
		if n > 0 {
			w.run(CrossLeg, across, spacingM)
		}
		w.run(SearchLeg, course, lengthM)
	}
	return w.done()
}

// Track follows a track of two or more points. With a spacing of nil it runs
// along it one way (track line search, non-return); with a spacing it runs out
// half a spacing to the right of the track and back half a spacing on the
// other side (track line search, return; the names are those of JP 3-50 vol.
// I chapter 5, the offsets from memory). Corners are mitred.
func Track(points []nav.Offset, spacingM float64) ([]Leg, error) {
	if len(points) < 2 || len(points) > maxLegs/2 {
		return nil, refuse("a track has two to %d points", maxLegs/2)
	}
	for i := range points[1:] {
		if points[i+1].Sub(points[i]).RangeM() < 1 {
			return nil, refuse("two points of the track that follow each other are the same")
		}
	}
	if spacingM < 0 || spacingM != spacingM {
		return nil, refuse("the spacing must not be negative")
	}
	if spacingM == 0 {
		return through(points)
	}
	out, err := beside(points, spacingM/2)
	if err != nil {
		return nil, err
	}
	back, err := beside(points, -spacingM/2)
	if err != nil {
		return nil, err
	}
	for i := len(back) - 1; i >= 0; i-- {
		out = append(out, back[i])
	}
	legs, err := through(out)
	if err != nil {
		return nil, err
	}
	legs[len(points)-1].Kind = CrossLeg
	return legs, nil
}

// through runs from point to point.
func through(points []nav.Offset) ([]Leg, error) {
	w := walk{at: points[0]}
	if r := points[0].RangeM(); r > maxExtentM {
		return nil, refuse("it begins %.0f nm from its datum", r/nav.MetresPerNM)
	}
	for _, p := range points[1:] {
		run := p.Sub(w.at)
		course, _ := run.Direction().Get()
		w.run(SearchLeg, course, run.RangeM())
		w.at = p
	}
	return w.done()
}

// beside moves a track sideways, to the right by rightM.
func beside(points []nav.Offset, rightM float64) ([]nav.Offset, error) {
	out := make([]nav.Offset, 0, len(points))
	for i, p := range points {
		before, after := p, p
		if i > 0 {
			before = points[i-1]
		}
		if i < len(points)-1 {
			after = points[i+1]
		}
		shift, err := mitre(before, p, after, rightM)
		if err != nil {
			return nil, err
		}
		out = append(out, p.Add(shift))
	}
	return out, nil
}

// mitre is the shift of a corner so that both legs come to lie rightM to the
// right. A turn so sharp that the corner would fly off is refused.
func mitre(before, p, after nav.Offset, rightM float64) (nav.Offset, error) {
	in, okIn := p.Sub(before).Direction().Get()
	next, okNext := after.Sub(p).Direction().Get()
	switch {
	case !okIn:
		in = next
	case !okNext:
		next = in
	}
	turn := next.Minus(in)
	if turn > 150 || turn < -150 {
		return nav.Offset{}, refuse("the track turns by %.0f degrees at one point; 150 is the limit for legs beside it", turn)
	}
	middle := in.Add(turn / 2)
	return nav.Along(middle.Add(90), rightM/cosDeg(turn/2)), nil
}
