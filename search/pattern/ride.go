package pattern

import (
	"errors"
	"fmt"
	"math"
	"time"

	"wakeback/drift/nav"
)

// Water is how a vessel runs a pattern: how fast, in what water, and how the
// datum moves.
type Water struct {
	SpeedKn    float64      // of the vessel through the water
	Current    nav.Velocity // of the water over the ground
	DatumDrift nav.Velocity // of the datum over the ground
}

// Run is a leg as it is steered.
type Run struct {
	Leg
	Steer  nav.TrueDeg  // heading through the water, for a vessel without leeway of its own
	Ground nav.TrueDeg  // course made good over the ground
	SogKn  float64      // speed made good over the ground
	RunS   float64      // time it takes
	Begin  time.Time    //
	Start  nav.Position // over the ground, at Begin
	End    nav.Position // over the ground, when it is run
}

// ErrNotMadeGood is wrapped when a course cannot be held: the water carries
// the vessel off faster than it can make up for.
var ErrNotMadeGood = errors.New("the course cannot be made good")

// creepMs is the slowest speed along a leg that still counts as making it
// good: a twentieth of a metre a second, a quarter of an hour for 50 m. Our choice.
const creepMs = 0.05

// Steer finds the heading that makes good a course in the datum frame, and
// the speed along it. The velocity in the datum frame is heading x speed +
// current - datum drift; current and drift cancel but for what the wind does
// to the person.
func (w Water) Steer(course nav.TrueDeg) (heading nav.TrueDeg, alongMs float64, err error) {
	v := w.SpeedKn * nav.MsPerKn
	if math.IsNaN(v) || math.IsInf(v, 0) || v <= 0 {
		return 0, 0, fmt.Errorf("%w: the vessel's speed must be more than nothing", ErrNotMadeGood)
	}
	e := nav.Along(course, 1)
	slip := w.DatumDrift.Sub(w.Current) // what has to be made up for
	along := slip.EastMs*e.EastM + slip.NorthMs*e.NorthM
	across := slip.EastMs*e.NorthM - slip.NorthMs*e.EastM
	room := v*v - across*across
	alongMs = math.Sqrt(math.Max(room, 0)) - along
	if room <= 0 || alongMs < creepMs {
		return 0, 0, fmt.Errorf("%w: on %s the water and the datum part at %.1f kn, and the vessel makes %.1f kn",
			ErrNotMadeGood, course, slip.SpeedKn(), w.SpeedKn)
	}
	through := nav.Velocity{EastMs: alongMs*e.EastM + slip.EastMs, NorthMs: alongMs*e.NorthM + slip.NorthMs}
	heading, _ = through.Direction().Get()
	return heading, alongMs, nil
}

// Ride says how to steer legs from a moment on, with the datum's place at
// that moment. It refuses the whole pattern when one course cannot be made
// good, naming the leg.
func Ride(legs []Leg, datum nav.Position, begin time.Time, w Water) ([]Run, error) {
	plane := nav.NewPlane(datum)
	runs := make([]Run, 0, len(legs))
	var elapsed time.Duration
	for i, l := range legs {
		heading, alongMs, err := w.Steer(l.Course)
		if err != nil {
			return nil, fmt.Errorf("leg %d: %w", i+1, err)
		}
		runS := l.LengthM / alongMs
		end := elapsed + time.Duration(runS*float64(time.Second))
		if end > maxRide {
			return nil, refuse("it takes more than %.0f days at this speed", maxRide.Hours()/24)
		}
		ground := nav.Towards(l.Course, alongMs/nav.MsPerKn).Add(w.DatumDrift)
		runs = append(runs, Run{
			Leg: l, Steer: heading, RunS: runS, Begin: begin.Add(elapsed),
			Ground: ground.Direction().Or(l.Course), SogKn: ground.SpeedKn(),
			Start: plane.Position(l.From.Add(w.DatumDrift.For(elapsed))),
			End:   plane.Position(l.To.Add(w.DatumDrift.For(end))),
		})
		elapsed = end
	}
	return runs, nil
}

// maxRide bounds the time a pattern may take, so that no speed near nothing
// overflows a time; our choice.
const maxRide = 30 * 24 * time.Hour

// CourseToSteer solves the current triangle for a course over the ground: the
// heading, and the speed made good.
func CourseToSteer(track nav.TrueDeg, speedKn float64, current nav.Velocity) (heading nav.TrueDeg, sogKn float64, err error) {
	heading, ms, err := Water{SpeedKn: speedKn, Current: current}.Steer(track)
	return heading, ms / nav.MsPerKn, err
}

func cosDeg(deg float64) float64 { return math.Cos(deg * math.Pi / 180) }

func firstOf(errs ...error) error {
	for _, err := range errs {
		if err != nil {
			return err
		}
	}
	return nil
}
