package nav

import (
	"math"
	"time"
)

// Errors of reckoning by course and speed, one standard deviation: the upper
// ends of the typical 2 to 5 degrees and 3 to 10 per cent (table of a page
// that cites Bowditch's propagation of errors, seen there; not a manual).
const (
	reckonCourseSdDeg = 5
	reckonSpeedSdPart = 0.10
)

// Radius95 turns the standard deviation of one axis of a circular normal law
// into the radius that holds 95 of 100: sqrt(-2 ln 0.05).
const Radius95 = 2.447746830680816

// Reckon carries a fix on by its course and speed, for a time that may be
// negative. ErrorM of the result is the radius of 95 in 100: sigma² = (D sin
// sigma_c)² + (D sigma_s)², of which the larger is taken for both axes, with
// the fix's own error added. Absent when course or speed is not known.
func (f Fix) Reckon(d time.Duration) Opt[Fix] {
	v, ok := f.Velocity().Get()
	if !ok {
		return None[Fix]()
	}
	run := v.SpeedMs() * math.Abs(d.Seconds())
	sigma := math.Max(run*math.Sin(reckonCourseSdDeg*math.Pi/180), run*reckonSpeedSdPart)
	f.Position = f.Position.Shift(v.For(d))
	f.At = f.At.Add(d)
	f.ErrorM = Some(math.Hypot(Radius95*sigma, f.ErrorM.Or(0)))
	return Some(f)
}
