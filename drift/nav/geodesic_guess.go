package nav

import "math"

// guess is where to start looking for the azimuth.
type guess struct {
	alpha1 arc
	// final says that the line is so short that the guess is the answer; then
	// the rest is filled in.
	final  bool
	alpha2 arc
	sig12  float64 // arc length on the sphere of the guess
	dn     float64 // that sphere's radius is b dn
}

// epsilon is the rounding unit of float64.
const epsilon = 0x1p-52

// shortSigma is the arc up to which a sphere is as good as the ellipsoid. The
// sphere that fits the middle latitude errs by about f σ²/2 of a line of length
// σ; our choice keeps this under a hundredth of the rounding unit. That is
// 0.1 sqrt(2 epsilon / f), or 0.23 m.
var shortSigma = 0.1 * math.Sqrt(2*epsilon/flattening)

// guess starts with a sphere that fits the mean latitude (Karney 48 to 51), or
// near the antipode with the astroid (52 to 57).
func (pr *problem) guess() guess {
	b1, b2 := pr.beta1, pr.beta2
	d := b2.minus(b1)
	near := d.cos >= 0 && d.sin < 0.5 && b2.cos*pr.lam.rad < 0.5
	omega, dn := pr.lam.arc, 1.0
	if near {
		dn = meanStretch(b1, b2)
		omega = arcOf(pr.lam.rad / (axisRatio * dn))
	}
	alpha1 := greatCircle(b1, b2, omega)
	sig := arc{math.Sqrt(alpha1.sin*alpha1.sin + alpha1.cos*alpha1.cos), b1.sin*b2.sin + b1.cos*b2.cos*omega.cos}
	switch {
	case near && sig.sin < shortSigma:
		return guess{
			alpha1: phase(alpha1.sin, alpha1.cos), final: true,
			alpha2: finalAzimuth(b1, b2, omega), sig12: sig.radians(), dn: dn,
		}
	case sig.cos < 0 && sig.sin < 6*thirdFlat*math.Pi*b1.cos*b1.cos:
		alpha1 = pr.antipodal()
	}
	if !(alpha1.sin > 0) { // rounding only
		return guess{alpha1: arc{1, 0}}
	}
	return guess{alpha1: phase(alpha1.sin, alpha1.cos)}
}

// meanStretch is sqrt(1 + e'² sin²β) at the middle latitude: the reciprocal of
// (1-f)^-1 times Karney's mean w (48), in reduced latitudes.
func meanStretch(b1, b2 arc) float64 {
	sin, cos := b1.sin+b2.sin, b1.cos+b2.cos
	sinSq := sin * sin
	return math.Sqrt(1 + secondEccSq*sinSq/(sinSq+cos*cos))
}

// greatCircle is z1 of Karney 49, the vector along the azimuth at the start of
// a great circle; its length is the sine of the arc. It is written around the
// nearer of the two places where cos ω12 = ±1, so that it does not cancel.
func greatCircle(b1, b2, omega arc) arc {
	v := arc{sin: b2.cos * omega.sin}
	if omega.cos >= 0 {
		v.cos = b2.minus(b1).sin + b2.cos*b1.sin*(omega.sin*omega.sin/(1+omega.cos))
	} else {
		v.cos = b2.plus(b1).sin - b2.cos*b1.sin*(omega.sin*omega.sin/(1-omega.cos))
	}
	return v
}

// finalAzimuth is the azimuth at the end of a great circle (Karney 50), for
// small ω12.
func finalAzimuth(b1, b2, omega arc) arc {
	return phase(b1.cos*omega.sin,
		b2.minus(b1).sin-b1.cos*b2.sin*(omega.sin*omega.sin/(1+omega.cos)))
}

// shortLine takes the guess for the answer.
func (pr *problem) shortLine(g guess) solution {
	r := semiMinorM * g.dn
	sig := arcOf(g.sig12)
	return solution{
		rangeM: r * g.sig12, azi1: g.alpha1, azi2: g.alpha2,
		reducedM: r * sig.sin, scale12: sig.cos, scale21: sig.cos,
	}
}
