package nav

import (
	"math"
	"time"
)

// MetresPerNM is the international nautical mile: 1852 m exactly (First
// International Extraordinary Hydrographic Conference, Monaco 1929).
const MetresPerNM = 1852.0

// MsPerKn turns knots into metres per second: a knot is one mile an hour.
const MsPerKn = MetresPerNM / 3600

// Velocity is motion in a local level frame, in metres per second.
type Velocity struct {
	EastMs, NorthMs float64
}

// Offset is a shift in a local level frame, in metres.
type Offset struct {
	EastM  float64 `json:"east_m"`
	NorthM float64 `json:"north_m"`
}

// Towards makes the velocity of something going towards dir at speedKn: a
// vessel on its course, a current by its set and drift, a leeway.
func Towards(dir TrueDeg, speedKn float64) Velocity {
	sin, cos := sinCosDeg(float64(dir))
	v := speedKn * MsPerKn
	return Velocity{EastMs: v * sin, NorthMs: v * cos}
}

// BlowingFrom makes the velocity of air in a wind that blows from dir.
func BlowingFrom(dir TrueDeg, speedKn float64) Velocity {
	return Towards(dir.Reciprocal(), speedKn)
}

// Add is the vector sum.
func (v Velocity) Add(w Velocity) Velocity {
	return Velocity{v.EastMs + w.EastMs, v.NorthMs + w.NorthMs}
}

// Sub is the vector difference: v as seen by something that moves with w.
func (v Velocity) Sub(w Velocity) Velocity {
	return Velocity{v.EastMs - w.EastMs, v.NorthMs - w.NorthMs}
}

// Scale multiplies by a factor.
func (v Velocity) Scale(f float64) Velocity { return Velocity{v.EastMs * f, v.NorthMs * f} }

// Rotate turns the velocity clockwise by deg.
func (v Velocity) Rotate(deg float64) Velocity {
	sin, cos := sinCosDeg(deg)
	return Velocity{
		EastMs:  v.EastMs*cos + v.NorthMs*sin,
		NorthMs: v.NorthMs*cos - v.EastMs*sin,
	}
}

// SpeedMs is the speed in metres per second.
func (v Velocity) SpeedMs() float64 { return math.Hypot(v.EastMs, v.NorthMs) }

// SpeedKn is the speed in knots.
func (v Velocity) SpeedKn() float64 { return v.SpeedMs() / MsPerKn }

// Direction is where the velocity goes to; absent at rest and for NaN.
func (v Velocity) Direction() Opt[TrueDeg] { return direction(v.EastMs, v.NorthMs) }

// For is the shift after moving so for d.
func (v Velocity) For(d time.Duration) Offset {
	s := d.Seconds()
	return Offset{EastM: v.EastMs * s, NorthM: v.NorthMs * s}
}

// Add is the vector sum.
func (o Offset) Add(p Offset) Offset { return Offset{o.EastM + p.EastM, o.NorthM + p.NorthM} }

// Sub is the vector difference.
func (o Offset) Sub(p Offset) Offset { return Offset{o.EastM - p.EastM, o.NorthM - p.NorthM} }

// Scale multiplies by a factor.
func (o Offset) Scale(f float64) Offset { return Offset{o.EastM * f, o.NorthM * f} }

// RangeM is the length in metres.
func (o Offset) RangeM() float64 { return math.Hypot(o.EastM, o.NorthM) }

// Direction is where the shift leads to; absent when it is nil or NaN.
func (o Offset) Direction() Opt[TrueDeg] { return direction(o.EastM, o.NorthM) }

// Along makes the shift of rangeM metres towards dir.
func Along(dir TrueDeg, rangeM float64) Offset {
	sin, cos := sinCosDeg(float64(dir))
	return Offset{EastM: rangeM * sin, NorthM: rangeM * cos}
}

func direction(east, north float64) Opt[TrueDeg] {
	if east == 0 && north == 0 || math.IsNaN(east) || math.IsNaN(north) {
		return None[TrueDeg]()
	}
	return Some(True(math.Atan2(east, north) * (180 / math.Pi)))
}
