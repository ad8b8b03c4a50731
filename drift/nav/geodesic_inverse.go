package nav

import "math"

// solution is the answer to the inverse problem, with what a caller needs who
// goes on from it.
type solution struct {
	rangeM     float64
	azi1, azi2 arc
	reducedM   float64 // m12: see span.reducedLength
	scale12    float64 // M12: see span.scale
	scale21    float64 // M21, the same from the end to the start
	trials     int     // geodesics tried until one met the end; 0 where none was needed
}

// problem is the inverse problem in the one arrangement that is solved
// (Karney 44): the start is in the south and no nearer to the equator than the
// end, and the end lies to the east.
type problem struct {
	beta1, beta2 arc
	dn1, dn2     float64
	lam          longitudeStep
}

// solveInverse solves the inverse problem (Karney, section 4). Coordinates
// that are none give a range of NaN.
func solveInverse(a, b Position) solution {
	lat1, ok1 := latitude(a)
	lat2, ok2 := latitude(b)
	if !ok1 || !ok2 || !finite(float64(a.Lng)) || !finite(float64(b.Lng)) {
		return solution{rangeM: nan, azi1: arc{nan, nan}, azi2: arc{nan, nan}}
	}
	lat1, lat2 = coarsen(lat1), coarsen(lat2)
	lam := longitudeBetween(float64(a.Lng), float64(b.Lng))
	swap := math.Abs(lat1) < math.Abs(lat2)
	if swap {
		lat1, lat2 = lat2, lat1
	}
	mirror := lat1 >= 0 // a start on the equator counts as north: see [Line]
	if mirror {
		lat1, lat2 = -lat1, -lat2
	}
	pr := problem{beta1: reduced(lat1), beta2: reduced(lat2), lam: lam}
	pr.tieLatitudes(lat1, lat2)
	pr.dn1, pr.dn2 = stretch(pr.beta1), stretch(pr.beta2)
	return pr.solve().arranged(swap, mirror, lam.west)
}

// tieLatitudes makes equal latitudes equal to the last bit: the formulas for
// β2 = ±β1 are others than those for latitudes that nearly agree.
func (pr *problem) tieLatitudes(lat1, lat2 float64) {
	if math.Abs(lat2) == -lat1 {
		pr.beta2 = arc{math.Copysign(pr.beta1.sin, lat2), pr.beta1.cos}
		return
	}
	// Different latitudes may still round to one sine or one cosine.
	if pr.beta1.cos < -pr.beta1.sin {
		if pr.beta1.cos == pr.beta2.cos {
			pr.beta2.sin = math.Copysign(pr.beta1.sin, pr.beta2.sin)
		}
	} else if math.Abs(pr.beta2.sin) == -pr.beta1.sin {
		pr.beta2.cos = pr.beta1.cos
	}
}

// arranged turns the solution of the arranged problem into that of the one
// that was asked (end of Karney, section 4).
func (s solution) arranged(swap, mirror, west bool) solution {
	if swap {
		s.azi1, s.azi2 = s.azi2, s.azi1
		s.scale12, s.scale21 = s.scale21, s.scale12
	}
	// Run backwards, a line points the other way in both components; but it
	// was then mirrored in longitude once more, to lead east.
	if west {
		s.azi1.sin, s.azi2.sin = -s.azi1.sin, -s.azi2.sin
	}
	if swap != mirror {
		s.azi1.cos, s.azi2.cos = -s.azi1.cos, -s.azi2.cos
	}
	return s
}

// solve picks the way to solve the arranged problem.
func (pr *problem) solve() solution {
	// A cosine of tiny is a pole, where every line is a meridian.
	if pr.beta1.cos == tiny || pr.lam.sin == 0 {
		if s, ok := pr.meridian(); ok {
			return s
		}
	}
	// On the equator the equator itself is shortest until λ12 > (1 - f) π.
	if pr.beta1.sin == 0 && pr.lam.short >= flattening*halfTurn {
		return pr.equator()
	}
	g := pr.guess()
	if g.final {
		return pr.shortLine(g)
	}
	return pr.newton(g.alpha1)
}

// meridian solves along a meridian. It fails where another line is shorter.
func (pr *problem) meridian() (solution, bool) {
	alpha1, alpha2 := arc{pr.lam.sin, pr.lam.cos}, arc{0, 1}
	sp := span{
		sig1: phase(pr.beta1.sin, alpha1.cos*pr.beta1.cos),
		sig2: phase(pr.beta2.sin, alpha2.cos*pr.beta2.cos),
		dn1:  pr.dn1, dn2: pr.dn2, eps: expansion(secondEccSq),
	}
	sp.sig12 = sp.sig2.ahead(sp.sig1).radians()
	s := sp.solution(alpha1, alpha2)
	return s, sp.sig12 < 1 || s.reducedM >= 0
}

// equator solves along the equator (Karney, section 4): σ = λ / (1 - f).
func (pr *problem) equator() solution {
	sig := arcOf(pr.lam.rad / axisRatio)
	return solution{
		rangeM: semiMajorM * pr.lam.rad, azi1: arc{1, 0}, azi2: arc{1, 0},
		reducedM: semiMinorM * sig.sin, scale12: sig.cos, scale21: sig.cos,
	}
}

// solution measures a stretch whose azimuths are known.
func (s *span) solution(alpha1, alpha2 arc) solution {
	j12 := s.j12()
	back := s.reversed()
	return solution{
		rangeM: semiMinorM * s.distance(), azi1: alpha1, azi2: alpha2,
		reducedM: semiMinorM * s.reducedLength(j12),
		scale12:  s.scale(j12), scale21: back.scale(j12),
	}
}
