package weather

import (
	"errors"
	"fmt"
	"math"
	"time"

	"wakeback/drift/nav"
)

// Cov is a covariance of two components, in m²/s².
type Cov struct{ EE, NN, EN float64 }

// Add is the covariance of a sum or difference of two independent velocities.
func (c Cov) Add(d Cov) Cov { return Cov{c.EE + d.EE, c.NN + d.NN, c.EN + d.EN} }

// SDMs is the standard deviation of a component, as if it were the same in all
// directions: that with the same total variance.
func (c Cov) SDMs() float64 { return math.Sqrt((c.EE + c.NN) / 2) }

// Measurement is a velocity with its covariance.
type Measurement struct {
	Velocity nav.Velocity
	Cov      Cov
}

// Sample makes a sample of the measurement.
func (m Measurement) Sample(from time.Time, over time.Duration, source Source, name string) Sample {
	return Sample{From: from, Over: over, Velocity: m.Velocity, SDMs: nav.Some(m.Cov.SDMs()), Source: source, Name: name, Said: from.Add(over)}
}

// PolarCov is the covariance of a velocity known by direction and speed: a
// standard deviation sdMs along it, and of sdDeg in direction.
func PolarCov(v nav.Velocity, sdMs, sdDeg float64) Cov {
	along, across := sdMs*sdMs, sqr(v.SpeedMs()*sdDeg*math.Pi/180)
	dir, ok := v.Direction().Get()
	if !ok { // at rest: the speed's error, whichever way
		return Cov{EE: along, NN: along}
	}
	sin, cos := math.Sincos(float64(dir) * math.Pi / 180)
	return Cov{
		EE: along*sin*sin + across*cos*cos,
		NN: along*cos*cos + across*sin*sin,
		EN: (along - across) * sin * cos,
	}
}

func sqr(x float64) float64 { return x * x }

// Underway is a vessel's motion by its instruments, averaged over minutes.
type Underway struct {
	CogTrue   nav.TrueDeg
	SogKn     float64
	Heading   nav.TrueDeg
	StwKn     float64
	LeewayDeg float64 // the vessel's own leeway angle, positive to starboard

	// Standard deviations; absent means the usual ones of a yacht: 0.1 kn, 1,
	// 0.3 kn and 3 degrees. Our choice, because no source gives them.
	SogSDKn, CogSDDeg, StwSDKn, HeadingSDDeg nav.Opt[float64]
}

// ErrTooSlow refuses a set and drift from instruments at a crawl, where log
// and course over the ground are noise.
var ErrTooSlow = errors.New("set and drift from GPS and log needs 1.5 kn through the water: stop and watch a marker, or drift, instead")

// minLogKn is the least speed for [SetAndDrift]. Our choice, because paddle
// wheel logs and courses over the ground fail below it.
const minLogKn = 1.5

// SetAndDrift is the current from motion over the ground less that through the
// water. It is not to be used while turning or changing speed. The result
// already holds the wind-driven current: nothing is to be added to it.
func SetAndDrift(u Underway) (Measurement, error) {
	if !(u.StwKn >= minLogKn) {
		return Measurement{}, ErrTooSlow
	}
	ground := nav.Towards(u.CogTrue, u.SogKn)
	water := ThroughWater(u.Heading, u.LeewayDeg, u.StwKn)
	m := Measurement{
		Velocity: ground.Sub(water),
		Cov: PolarCov(ground, u.SogSDKn.Or(0.1)*nav.MsPerKn, u.CogSDDeg.Or(1)).
			Add(PolarCov(water, u.StwSDKn.Or(0.3)*nav.MsPerKn, u.HeadingSDDeg.Or(3))),
	}
	if !(m.Velocity.SpeedMs() <= maxCurrentMs) {
		return Measurement{}, &FieldError{Field: "speed", Value: fmt.Sprintf("%.1f kn", m.Velocity.SpeedKn()), Expected: "instruments that leave a current of 20 kn or less"}
	}
	return m, nil
}

// ReciprocalMean is the mean of two currents measured on opposite courses, one
// soon after the other: the errors of log and compass cancel to first order.
func ReciprocalMean(a, b Measurement) Measurement {
	sum := a.Cov.Add(b.Cov)
	return Measurement{a.Velocity.Add(b.Velocity).Scale(0.5), Cov{sum.EE / 4, sum.NN / 4, sum.EN / 4}}
}

// minWatch is the shortest time a drift is taken from. Our choice, because two
// fixes of 10 m each make 0.1 kn of error in it.
const minWatch = 5 * time.Minute

// ErrTooShort refuses a drift from two fixes too close in time.
var ErrTooShort = errors.New("a drift needs two fixes at least 5 minutes apart, in order")

// DriftOf is what a floating thing did over the ground between two fixes. A
// fix without an error counts as 15 m (95 in 100).
func DriftOf(first, last nav.Fix) (Measurement, error) {
	d := last.At.Sub(first.At)
	if d < minWatch {
		return Measurement{}, ErrTooShort
	}
	if err := errors.Join(first.Position.Validate(), last.Position.Validate()); err != nil {
		return Measurement{}, fmt.Errorf("drift of a marker: %w", err)
	}
	o := nav.NewPlane(first.Position).Offset(last.Position)
	s := d.Seconds()
	variance := (sqr(first.ErrorM.Or(15)/radius95) + sqr(last.ErrorM.Or(15)/radius95)) / (s * s)
	return Measurement{nav.Velocity{EastMs: o.EastM / s, NorthMs: o.NorthM / s}, Cov{EE: variance, NN: variance}}, nil
}

// radius95 is the radius in standard deviations that holds 95 % of a circular
// normal distribution: sqrt(-2 ln 0.05).
const radius95 = 2.447746830680816

// CurrentFromMarker is the current from a marker's drift less its leeway,
// which has a standard deviation of leewaySDMs in each component. A marker
// whose leeway nobody knows keeps it in the current: say so by a larger
// leewaySDMs.
func CurrentFromMarker(drift Measurement, leeway nav.Velocity, leewaySDMs float64) Measurement {
	v := leewaySDMs * leewaySDMs
	return Measurement{drift.Velocity.Sub(leeway), drift.Cov.Add(Cov{EE: v, NN: v})}
}
