package drift

import (
	"math"

	"wakeback/drift/nav"
)

// WindRange says how a wind lies to the winds of the trials.
type WindRange string

// The ranges. Where the trials' winds are not known, those over 20 m/s (about
// 40 kn) count as above: our choice, because trials were mostly held in light
// to fresh winds. Nothing is cut off there; the figure is carried on, and this
// is said.
const (
	InRange    WindRange = "within the winds of the trials"
	RangeAbove WindRange = "above the winds of the trials: leeway carried on, less certain"
	RangeBelow WindRange = "below the winds of the trials: leeway carried on, less certain"
	NoWind     WindRange = "no wind: no leeway, it moves with the water"
)

// testedMaxMs stands for the end of the trials' winds where that is not known.
const testedMaxMs = 20

// RangeOf says how a wind of windMs at 10 m lies to the trials of the class.
func (c Class) RangeOf(windMs float64) WindRange {
	switch {
	case windMs == 0:
		return NoWind
	case windMs > c.WindMaxMs.Or(testedMaxMs):
		return RangeAbove
	case windMs < c.WindMinMs.Or(0):
		return RangeBelow
	}
	return InRange
}

// Leeway is how a wind moves an object through the water. Velocities go
// towards.
type Leeway struct {
	Downwind      nav.Velocity // straight downwind, at the full speed
	Left, Right   nav.Velocity // turned by the divergence to either side
	DivergenceDeg float64
	Range         WindRange
	// DownwindMs and CrosswindMs are the components as the cloud has them: the
	// mean downwind, and the root mean square to either side.
	DownwindMs, CrosswindMs float64
}

// LeewayAt is the leeway of a class in a wind at 10 m. Without wind there is
// none: the object moves with the water (Breivik and Allen 2008, section 2.2).
func LeewayAt(c Class, wind nav.Velocity) Leeway {
	w := wind.SpeedMs()
	l := Leeway{DivergenceDeg: c.DivergenceDeg, Range: c.RangeOf(w)}
	if w == 0 {
		return l
	}
	l.Downwind = wind.Scale(c.SpeedMs(w) / w)
	l.Left = l.Downwind.Rotate(-c.DivergenceDeg)
	l.Right = l.Downwind.Rotate(c.DivergenceDeg)
	l.DownwindMs, l.CrosswindMs = c.componentsMs(w)
	return l
}

// SpeedMs is the leeway speed in a wind of windMs at 10 m: slope × wind +
// offset, and never below zero.
func (c Class) SpeedMs(windMs float64) float64 {
	if windMs == 0 {
		return 0
	}
	return math.Max(c.Slope*windMs+c.OffsetMs, 0)
}

func (c Class) componentsMs(windMs float64) (down, cross float64) {
	if k, ok := c.Components.Get(); ok {
		r, l := k.Right.At(windMs), k.Left.At(windMs)
		return k.Downwind.At(windMs), math.Sqrt((r*r + l*l) / 2)
	}
	kd, kc := divergenceFactors(c.DivergenceDeg)
	return c.SpeedMs(windMs) * kd, c.SpeedMs(windMs) * kc
}

// divergenceFactors are the mean cosine and the root mean square sine of an
// angle that lies evenly between -d and +d degrees: sin d / d, and the root of
// 1/2 - sin 2d / 4d. That the angle lies so is our choice, until the published
// components are filled in.
func divergenceFactors(deg float64) (down, cross float64) {
	if deg == 0 {
		return 1, 0
	}
	d := deg * math.Pi / 180
	return math.Sin(d) / d, math.Sqrt(0.5 - math.Sin(2*d)/(4*d))
}

// speedSpread is the relative standard deviation of the leeway speed of a class
// whose standard error is not filled in. Our choice, because loading, clothing
// and size change leeway by about so much within one class.
const speedSpread = 0.3

// speedSDMs is the standard deviation of the leeway speed in a wind.
func (c Class) speedSDMs(windMs float64) float64 {
	if k, ok := c.Components.Get(); ok {
		return k.Downwind.SyxMs * (0.5 + windMs/20)
	}
	return speedSpread * c.SpeedMs(windMs)
}

func finite(v float64) bool { return !math.IsNaN(v) && !math.IsInf(v, 0) }
