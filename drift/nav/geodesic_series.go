package nav

import "math"

// order is the order of the series in ε. With ε below 0.0017 on this Earth the
// first term left out is of the order of 1e-20.
const order = 6

// coeffs are the coefficients of a sine series: element l-1 belongs to 2lσ.
type coeffs [order]float64

// at sums Σ c[l] sin 2lσ by Clenshaw's recurrence.
func (c *coeffs) at(sigma arc) float64 {
	x := 2 * (sigma.cos - sigma.sin) * (sigma.cos + sigma.sin) // 2 cos 2σ
	y6 := c[5]
	y5 := x*y6 + c[4]
	y4 := x*y5 - y6 + c[3]
	y3 := x*y4 - y5 + c[2]
	y2 := x*y3 - y4 + c[1]
	y1 := x*y2 - y3 + c[0]
	return 2 * sigma.sin * sigma.cos * y1
}

// expansion is ε from k² (Karney 16, written so that it does not cancel).
func expansion(k2 float64) float64 {
	root := math.Sqrt(1 + k2)
	return k2 / (2*(1+root) + k2)
}

// a1 is A1 (Karney 17), the mean of the distance integral I1.
func a1(eps float64) float64 {
	e2 := eps * eps
	return (1 + e2*(1.0/4+e2*(1.0/64+e2*(1.0/256)))) / (1 - eps)
}

// c1 are C1l (Karney 18), the waves of the distance integral I1.
func c1(eps float64) coeffs {
	e2 := eps * eps
	p := powers(eps)
	return coeffs{
		p[0] * (-1.0/2 + e2*(3.0/16-e2*(1.0/32))),
		p[1] * (-1.0/16 + e2*(1.0/32-e2*(9.0/2048))),
		p[2] * (-1.0/48 + e2*(3.0/256)),
		p[3] * (-5.0/512 + e2*(3.0/512)),
		p[4] * (-7.0 / 1280),
		p[5] * (-7.0 / 2048),
	}
}

// c1Reverted are C'1l (Karney 21), which give σ from τ = s / (b A1).
func c1Reverted(eps float64) coeffs {
	e2 := eps * eps
	p := powers(eps)
	return coeffs{
		p[0] * (1.0/2 + e2*(-9.0/32+e2*(205.0/1536))),
		p[1] * (5.0/16 + e2*(-37.0/96+e2*(1335.0/4096))),
		p[2] * (29.0/96 - e2*(75.0/128)),
		p[3] * (539.0/1536 - e2*(2391.0/2560)),
		p[4] * (3467.0 / 7680),
		p[5] * (38081.0 / 61440),
	}
}

// a2 is A2 (Karney 42), the mean of the integral I2 in the reduced length.
func a2(eps float64) float64 {
	e2 := eps * eps
	return (1 + e2*(1.0/4+e2*(9.0/64+e2*(25.0/256)))) * (1 - eps)
}

// c2 are C2l (Karney 43), the waves of the integral I2.
func c2(eps float64) coeffs {
	e2 := eps * eps
	p := powers(eps)
	return coeffs{
		p[0] * (1.0/2 + e2*(1.0/16+e2*(1.0/32))),
		p[1] * (3.0/16 + e2*(1.0/32+e2*(35.0/2048))),
		p[2] * (5.0/48 + e2*(5.0/256)),
		p[3] * (35.0/512 + e2*(7.0/512)),
		p[4] * (63.0 / 1280),
		p[5] * (77.0 / 2048),
	}
}

// a3 is A3 (Karney 24), the mean of the longitude integral I3.
func a3(eps float64) float64 {
	const n = thirdFlat
	return 1 - eps*((1-n)/2+
		eps*((1.0/4+n/8-3*n*n/8)+
			eps*((1.0/16+3*n/16+n*n/16)+
				eps*((3.0/64+n/32)+
					eps*(3.0/128)))))
}

// c3 are C3l (Karney 25), the waves of the longitude integral I3. There is no
// sixth: the integral is multiplied by f, so order 5 is enough.
func c3(eps float64) coeffs {
	const n = thirdFlat
	p := powers(eps)
	return coeffs{
		p[0] * ((1-n)/4 + eps*((1-n*n)/8+eps*((3.0/64+3*n/64-n*n/64)+eps*((5.0/128+n/64)+eps*(3.0/128))))),
		p[1] * ((1.0/16 - 3*n/32 + n*n/32) + eps*((3.0/64-n/32-3*n*n/64)+eps*((3.0/128+n/128)+eps*(5.0/256)))),
		p[2] * ((5.0/192 - 3*n/64 + 5*n*n/192) + eps*((3.0/128-5*n/192)+eps*(7.0/512))),
		p[3] * ((7.0/512 - 7*n/256) + eps*(7.0/512)),
		p[4] * (21.0 / 2560),
		0,
	}
}

func powers(eps float64) coeffs {
	e2 := eps * eps
	e3 := e2 * eps
	return coeffs{eps, e2, e3, e2 * e2, e2 * e3, e3 * e3}
}
