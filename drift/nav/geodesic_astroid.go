package nav

import "math"

// antipodal guesses the azimuth, as a vector, of a line to a point near the
// antipode, where the geodesics touch an astroid rather than meet (Karney 53
// to 57). The antipode is the origin; x is to the east, y to the north, in
// units of half the width of the astroid.
func (pr *problem) antipodal() arc {
	b1, b2 := pr.beta1, pr.beta2
	xUnit := flattening * b1.cos * a3(expansion(secondEccSq*b1.sin*b1.sin)) * math.Pi
	yUnit := xUnit * b1.cos
	x, y := -pr.lam.short/xUnit, b2.plus(b1).sin/yUnit

	// On the cut between the cusps, where y is 0, the solutions of the
	// quartic merge (Karney 57). Widths of this strip: our choice, wide
	// against rounding, narrow against what Newton's method mends.
	const yStrip, xStrip = 200 * epsilon, 1000 * 1.5e-8
	if y > -yStrip && x > -1-xStrip {
		sin := min(1, -x)
		return arc{sin, -math.Sqrt(1 - sin*sin)}
	}
	k := astroid(x, y)
	// From the astroid comes a better ω12, and from that the great circle:
	// closer than the azimuth of 56 when the point is not that near.
	short := xUnit * (-x * k / (1 + k))
	omega := arcOf(short)
	omega.cos = -omega.cos
	return greatCircle(b1, b2, omega)
}

// astroid is the one positive root of μ⁴ + 2μ³ + (1-x²-y²)μ² - 2y²μ - y² = 0
// (Karney 55), by way of the resolvent cubic of the quartic (Vermeille, Direct
// transformation from geocentric coordinates to geodetic coordinates, Journal
// of Geodesy 76 (2002), pages 451-454, solves one of the same form; from
// memory).
func astroid(x, y float64) float64 {
	p, q := x*x, y*y
	r := (p + q - 1) / 6
	if q == 0 && r <= 0 {
		return 0 // on the cut, between the cusps
	}
	u := resolvent(r, p*q/4)
	v := math.Sqrt(u*u + q)
	uv := u + v
	if u < 0 {
		uv = q / (v - u) // the same without cancelling
	}
	w := (uv - q) / (2 * v)
	return uv / (math.Sqrt(uv+w*w) + w)
}

// resolvent is a real root u of the cubic, given r and s = p q / 4. Where
// there are three, it is one that keeps u² + q positive.
func resolvent(r, s float64) float64 {
	r3 := r * r * r
	disc := s * (s + 2*r3)
	if disc < 0 { // three real roots, by cosines
		angle := math.Atan2(math.Sqrt(-disc), -(s + r3))
		return r + 2*r*math.Cos(angle/3)
	}
	t3 := s + r3
	t3 += math.Copysign(math.Sqrt(disc), t3) // away from cancelling
	t := math.Cbrt(t3)
	if t == 0 {
		return r
	}
	return r + t + r*r/t
}
