package nav

import "math"

// span is a stretch of a geodesic on the auxiliary sphere.
type span struct {
	sig1, sig2 arc     // σ at its ends
	sig12      float64 // σ2 - σ1
	dn1, dn2   float64 // sqrt(1 + k² sin²σ) at its ends
	eps        float64
}

// stretch is sqrt(1 + e'² sin²β), which is sqrt(1 + k² sin²σ) on any geodesic
// through that latitude.
func stretch(beta arc) float64 { return math.Sqrt(1 + secondEccSq*beta.sin*beta.sin) }

// waves is the difference of a sine series between the ends.
func (s *span) waves(c coeffs) float64 { return c.at(s.sig2) - c.at(s.sig1) }

// distance is s12 / b (Karney 7 and 15).
func (s *span) distance() float64 { return a1(s.eps) * (s.sig12 + s.waves(c1(s.eps))) }

// j12 is J(σ2) - J(σ1), with J = I1 - I2 (Karney 40, 15 and 41).
func (s *span) j12() float64 {
	mean1, mean2 := a1(s.eps), a2(s.eps)
	wave1, wave2 := c1(s.eps), c2(s.eps)
	for l := range wave1 {
		wave1[l] = mean1*wave1[l] - mean2*wave2[l]
	}
	return (mean1-mean2)*s.sig12 + s.waves(wave1)
}

// reducedLength is m12 / b (Karney 38): how far, per radian, geodesics from
// the start fan out at the end.
func (s *span) reducedLength(j12 float64) float64 {
	return s.dn2*(s.sig1.cos*s.sig2.sin) - s.dn1*(s.sig1.sin*s.sig2.cos) - s.sig1.cos*s.sig2.cos*j12
}

// scale is M12 (Karney 39): the distance at the end, over that at the start,
// of two geodesics that start parallel.
func (s *span) scale(j12 float64) float64 {
	return s.sig1.cos*s.sig2.cos + (s.dn2*s.sig2.sin-s.sig2.cos*j12)*s.sig1.sin/s.dn1
}

// reversed is the same stretch run from its end to its start.
func (s *span) reversed() span {
	return span{
		sig1: arc{-s.sig2.sin, s.sig2.cos}, sig2: arc{-s.sig1.sin, s.sig1.cos},
		sig12: s.sig12, dn1: s.dn2, dn2: s.dn1, eps: s.eps,
	}
}
