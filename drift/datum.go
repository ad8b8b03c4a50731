package drift

import (
	"fmt"
	"math"
	"time"

	"wakeback/drift/nav"
	"wakeback/drift/weather"
)

// Datum is where to look, by the vector sum of the manuals.
type Datum struct {
	At time.Time
	// FellAt is what the drift counts from: the middle of the time of the fall.
	FellAt time.Time
	// BeforeFall is true when At is not after the time of the fall: then nothing
	// has drifted yet, and the datum is the start.
	BeforeFall bool

	// Point is the datum straight downwind. It is absent for a corridor: a
	// stretch of track is never shown as one point.
	Point nav.Opt[nav.Position]
	// Left and Right are the datums where leeway diverges.
	Left, Right nav.Opt[nav.Position]
	// Shift is how far it has moved in all, in the plane around the start.
	Shift nav.Offset
	// Corridor is where those are now who fell at moments of the window, the
	// first to have fallen first; empty for a point.
	Corridor []Drifted

	// TotalProbableErrorM is the manuals' total probable error: a radius around
	// each of the datums that holds half of all cases. Error95M holds 95 of
	// 100. Cover95M is a radius around Point that covers the 95 circles of left
	// and right datum too. For a corridor they are those of the oldest part.
	TotalProbableErrorM, Error95M, Cover95M float64
	Errors                                  Errors

	// Drift is the motion over the ground at At, with leeway straight downwind.
	Drift   nav.Velocity
	Leeway  Leeway
	Wind    nav.Opt[weather.Value] // at At
	Current nav.Opt[weather.Value] // at At

	// Cautions are what has to be said beside the figure.
	Cautions []string

	pull pull
}

// Drifted is one moment of a corridor.
type Drifted struct {
	FellAt         time.Time
	From           nav.Position // where the vessel was then
	Point          nav.Position // where someone is now who fell then
	Left, Right    nav.Position
	MovedM         float64
	ProbableErrorM float64
}

// Errors are the parts of a total probable error, each a radius that holds half
// of all cases, in metres.
type Errors struct{ StartM, TimeM, WindM, CurrentM, LeewayM float64 }

// DriftM is the probable error of the drift alone.
func (e Errors) DriftM() float64 {
	return math.Sqrt(e.TimeM*e.TimeM + e.WindM*e.WindM + e.CurrentM*e.CurrentM + e.LeewayM*e.LeewayM)
}

// TotalM is the total probable error (IAMSAR Manual vol. II, appendix K, from
// memory: the squares of the parts add up; the searcher's own error is left
// to who plans the search).
func (e Errors) TotalM() float64 { return math.Hypot(e.StartM, e.DriftM()) }

// pull is what wind and current did in a time.
type pull struct {
	winds, currents             []stretch
	current                     nav.Offset
	straight, left, right       nav.Offset // leeway
	windSD, currentSD, leewaySD float64    // standard deviations of one axis, m
}

// pulled adds up the stretches from one moment to another.
func (c Case) pulled(from, to time.Time) pull {
	p := pull{winds: c.windStretches(from, to), currents: c.currentStretches(from, to)}
	for _, w := range p.winds {
		d := w.Duration()
		l := LeewayAt(c.Class, w.Velocity)
		p.straight = p.straight.Add(l.Downwind.For(d))
		p.left = p.left.Add(l.Left.For(d))
		p.right = p.right.Add(l.Right.For(d))
		p.windSD += c.windErrorMs(w) * d.Seconds()
		p.leewaySD += c.Class.speedSDMs(w.Velocity.SpeedMs()) * d.Seconds()
	}
	for _, s := range p.currents {
		p.current = p.current.Add(s.Velocity.For(s.Duration()))
		p.currentSD += s.SDMs * s.Duration().Seconds()
	}
	return p
}

// windErrorMs is the standard deviation of one component of leeway by the error
// of the wind.
func (c Case) windErrorMs(w stretch) float64 {
	if w.known {
		return c.Class.slope() * w.SDMs
	}
	// Of a wind nobody knows, the whole leeway, whichever way.
	return c.Class.SpeedMs(w.SDMs*math.Sqrt2) / math.Sqrt2
}

// slope is the share of a change of wind that leeway follows.
func (c Class) slope() float64 {
	if k, ok := c.Components.Get(); ok {
		return k.Downwind.Slope
	}
	return c.Slope
}

// DatumAt is the datum of a case at a moment. The error wraps [ErrCase].
func DatumAt(c Case, at time.Time) (Datum, error) {
	if err := c.Validate(); err != nil {
		return Datum{}, err
	}
	fell := c.fellMid()
	if at.Sub(c.FellFrom) > MaxAge {
		return Datum{}, fmt.Errorf("%w: time: expected at most %d days after the fall", ErrCase, int(MaxAge.Hours()/24))
	}
	d := Datum{At: at, FellAt: fell, BeforeFall: !at.After(fell)}
	d.pull = c.pulled(fell, at)
	d.Shift = d.pull.current.Add(d.pull.straight)
	d.now(c)
	if c.Start.Corridor() {
		d.corridor(c)
	} else {
		d.point(c)
	}
	d.caution(c)
	return d, nil
}

// now fills in what holds at the moment.
func (d *Datum) now(c Case) {
	f := c.forcingAt(d.At)
	d.Wind, d.Current = c.Winds.At(d.At), c.Currents.At(d.At)
	d.Leeway = LeewayAt(c.Class, f.wind)
	d.Drift = f.current.Add(d.Leeway.Downwind)
}

// point fills in the datums of a start at one point.
func (d *Datum) point(c Case) {
	plane := c.plane()
	d.Point = nav.Some(plane.Position(d.Shift))
	left, right := d.pull.current.Add(d.pull.left), d.pull.current.Add(d.pull.right)
	if left != right {
		d.Left, d.Right = nav.Some(plane.Position(left)), nav.Some(plane.Position(right))
	}
	d.Errors = c.errors(d.pull, c.Start.error95M())
	// Whoever fell at another moment of the window drifted for another time:
	// the standard deviation of an even window is its length over root twelve.
	window := c.FellTo.Sub(c.FellFrom).Seconds() / math.Sqrt(12)
	if age := d.At.Sub(d.FellAt).Seconds(); age > 0 {
		d.Errors.TimeM = d.Shift.RangeM() / age * window * Radius50
	}
	d.total(math.Max(left.Sub(d.Shift).RangeM(), right.Sub(d.Shift).RangeM()))
}

func (d *Datum) total(fanM float64) {
	d.TotalProbableErrorM = d.Errors.TotalM()
	d.Error95M = d.TotalProbableErrorM / Radius50 * Radius95
	d.Cover95M = d.Error95M + fanM
}

func (c Case) errors(p pull, start95M float64) Errors {
	return Errors{
		StartM: start95M / Radius95 * Radius50,
		WindM:  p.windSD * Radius50, CurrentM: p.currentSD * Radius50, LeewayM: p.leewaySD * Radius50,
	}
}
