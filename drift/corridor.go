package drift

import (
	"math"
	"slices"
	"sort"
	"time"

	"wakeback/drift/nav"
)

// corridorParts is in how many parts of equal time a corridor is drawn. Our
// choice, because it bends only where the track or the stream does, and the
// moments of the track's own fixes are added up to corridorFixes.
const (
	corridorParts = 24
	corridorFixes = 200
)

// corridor fills in where someone is now who fell at each moment.
func (d *Datum) corridor(c Case) {
	plane := c.plane()
	for _, fell := range c.moments() {
		p := c.pulled(fell, d.At)
		from := pathAt(c.Start.Path, fell)
		o := plane.Offset(from.Position)
		shift := p.current.Add(p.straight)
		e := c.errors(p, from.ErrorM.Or(c.Start.error95M()))
		d.Corridor = append(d.Corridor, Drifted{
			FellAt: fell, From: from.Position,
			Point:  plane.Position(o.Add(shift)),
			Left:   plane.Position(o.Add(p.current).Add(p.left)),
			Right:  plane.Position(o.Add(p.current).Add(p.right)),
			MovedM: shift.RangeM(), ProbableErrorM: e.TotalM(),
		})
		if e.TotalM() >= d.Errors.TotalM() {
			d.Errors = e
			d.total(math.Max(p.left.Sub(p.straight).RangeM(), p.right.Sub(p.straight).RangeM()))
		}
	}
}

// moments are the times a corridor is worked out for, in order: both ends, even
// parts, and the fixes of the track, thinned where they are many.
func (c Case) moments() []time.Time {
	window := c.FellTo.Sub(c.FellFrom)
	moments := []time.Time{c.FellFrom}
	for i := 1; i <= corridorParts; i++ {
		moments = append(moments, c.FellFrom.Add(window*time.Duration(i)/corridorParts))
	}
	fixes := c.pathFixes()
	every := len(fixes)/corridorFixes + 1
	for i := 0; i < len(fixes); i += every {
		moments = append(moments, fixes[i].At)
	}
	sort.Slice(moments, func(i, j int) bool { return moments[i].Before(moments[j]) })
	return slices.CompactFunc(moments, time.Time.Equal)
}

// Ends are the first and the last moment of the corridor: whoever fell first
// drifted longest. They are absent for a point.
func (d Datum) Ends() (first, last nav.Opt[Drifted]) {
	if len(d.Corridor) == 0 {
		return nav.None[Drifted](), nav.None[Drifted]()
	}
	return nav.Some(d.Corridor[0]), nav.Some(d.Corridor[len(d.Corridor)-1])
}
