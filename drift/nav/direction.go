package nav

import "math"

// TrueDeg is a direction in degrees clockwise from true north, 0 up to but
// not including 360. Wind is named by where it blows from; current, drift and
// leeway by where they go: the name of the variable says which.
type TrueDeg float64

// MagneticDeg is a direction in degrees clockwise from magnetic north.
type MagneticDeg float64

// RelativeDeg is a direction in degrees from the bow, -180 (exclusive) to
// +180; positive is to starboard.
type RelativeDeg float64

// VariationDeg is magnetic variation in degrees; east is positive, so that
// true = magnetic + variation.
type VariationDeg float64

// NormDeg brings an angle into [0, 360). NaN and infinities give NaN.
func NormDeg(deg float64) float64 {
	d := math.Mod(deg, 360)
	if d < 0 {
		d += 360
	}
	if d >= 360 { // a tiny negative angle rounds up to 360
		d = 0
	}
	return d + 0 // never -0
}

// NormSignedDeg brings an angle into (-180, 180].
func NormSignedDeg(deg float64) float64 {
	d := NormDeg(deg)
	if d > 180 {
		d -= 360
	}
	return d
}

// True returns deg as a direction, brought into [0, 360).
func True(deg float64) TrueDeg { return TrueDeg(NormDeg(deg)) }

// Add turns the direction clockwise by deg.
func (t TrueDeg) Add(deg float64) TrueDeg { return True(float64(t) + deg) }

// Reciprocal is the opposite direction.
func (t TrueDeg) Reciprocal() TrueDeg { return t.Add(180) }

// Minus returns the signed turn in degrees, (-180, 180], that leads from u to
// t; positive is clockwise.
func (t TrueDeg) Minus(u TrueDeg) float64 { return NormSignedDeg(float64(t) - float64(u)) }

// Magnetic converts to a magnetic direction.
func (t TrueDeg) Magnetic(v VariationDeg) MagneticDeg {
	return MagneticDeg(NormDeg(float64(t) - float64(v)))
}

// True converts to a true direction.
func (m MagneticDeg) True(v VariationDeg) TrueDeg { return True(float64(m) + float64(v)) }

// RelativeTo returns the direction as seen from a bow pointing to heading.
func (t TrueDeg) RelativeTo(heading TrueDeg) RelativeDeg { return RelativeDeg(t.Minus(heading)) }
