package pattern

import (
	"math"
	"time"

	"wakeback/drift/nav"
)

// Plan is legs laid on a drifting datum at a moment.
type Plan struct {
	Legs  []Leg
	Datum nav.Position // at Begin
	Begin time.Time
	Water Water
}

// Guidance is where a vessel is on its leg, and what to steer.
type Guidance struct {
	Leg    int     // from 0
	AlongM float64 // from the start of the leg
	ToGoM  float64 // to its end; negative when it is overrun
	CrossM float64 // off the leg, positive to the right of it
	// Course is the course in the datum frame that leads back onto the leg and
	// along it, Steer the heading through the water for it.
	Course nav.TrueDeg
	Steer  nav.TrueDeg
	// TurnInS is the time to the end of the leg at the speed along it.
	TurnInS nav.Opt[float64]
	// Done: the vessel has passed the end of the leg, or is within its turning
	// radius of it.
	Done bool
}

// DatumAt is where the datum of the plan is at a moment.
func (p Plan) DatumAt(at time.Time) nav.Position {
	return nav.NewPlane(p.Datum).Position(p.Water.DatumDrift.For(at.Sub(p.Begin)))
}

// OffsetOf is where a position lies in the datum frame at a moment.
func (p Plan) OffsetOf(own nav.Position, at time.Time) nav.Offset {
	return nav.NewPlane(p.Datum).Offset(own).Sub(p.Water.DatumDrift.For(at.Sub(p.Begin)))
}

// LegOverGround is where a leg lies over the ground at a moment: it rides along.
func (p Plan) LegOverGround(leg int, at time.Time) (from, to nav.Position) {
	plane := nav.NewPlane(p.Datum)
	ride := p.Water.DatumDrift.For(at.Sub(p.Begin))
	return plane.Position(p.Legs[leg].From.Add(ride)), plane.Position(p.Legs[leg].To.Add(ride))
}

// Ways back onto a leg. Off by lookaheadS of running or more, the vessel
// closes the leg at up to closingDeg; nearer, in proportion. Our choice: at 5
// kn a minute ahead is 150 m, so 15 m off are taken back by 6 degrees.
const (
	lookaheadS = 60
	closingDeg = 45
)

// Guide says what to steer on a leg, for a vessel at a position at a moment.
// turnRadiusM is how far before the end of the leg the helm has to go over;
// nil when unknown. An error wraps [ErrNotMadeGood].
func (p Plan) Guide(leg int, own nav.Position, at time.Time, turnRadiusM float64) (Guidance, error) {
	l := p.Legs[leg]
	d := p.OffsetOf(own, at).Sub(l.From)
	e := nav.Along(l.Course, 1)
	g := Guidance{
		Leg:    leg,
		AlongM: d.EastM*e.EastM + d.NorthM*e.NorthM,
		CrossM: d.EastM*e.NorthM - d.NorthM*e.EastM,
	}
	g.ToGoM = l.LengthM - g.AlongM
	ahead := p.Water.SpeedKn * nav.MsPerKn * lookaheadS
	back := math.Atan2(-g.CrossM, ahead) * 180 / math.Pi
	g.Course = l.Course.Add(math.Max(-closingDeg, math.Min(closingDeg, back)))
	heading, alongMs, err := p.Water.Steer(g.Course)
	if err != nil {
		return Guidance{}, err
	}
	g.Steer = heading
	if g.ToGoM > 0 {
		g.TurnInS = nav.Some(math.Max(g.ToGoM-turnRadiusM, 0) / alongMs)
	}
	g.Done = g.ToGoM <= turnRadiusM && math.Abs(g.CrossM) <= math.Max(passWideM, turnRadiusM)
	return g, nil
}

// passWideM is how far off the end of a leg may be passed and the leg still
// counts as run to its end; our choice, about half the usual spacing for a
// person in the water. A vessel further off is led back first.
const passWideM = 100

// Advance is the leg being steered after a new position: the same, or the
// next once the leg is done. It never goes back, so that a glitch of the
// receiver does not make legs swing to and fro, and never skips a leg. The
// position has to be done twice, settleS apart, before the next leg counts;
// since is when it was first done, absent when it is not.
func (p Plan) Advance(leg int, g Guidance, at time.Time, since nav.Opt[time.Time]) (next int, sinceNext nav.Opt[time.Time]) {
	if !g.Done || leg >= len(p.Legs) {
		return leg, nav.None[time.Time]()
	}
	first, ok := since.Get()
	if !ok {
		return leg, nav.Some(at)
	}
	if at.Sub(first) < settle {
		return leg, since
	}
	return leg + 1, nav.None[time.Time]()
}

// settle is how long a leg has to stay done; our choice: two fixes more.
const settle = 2 * time.Second
