package nav

import (
	"math"

	"github.com/golang/geo/s1"
)

// Geodesic is one geodesic from its start on, in both directions, with all
// worked out that does not depend on how far one goes. Make it with [LineFrom].
type Geodesic struct {
	start  Position
	alpha0 arc // azimuth at the node
	sig1   arc
	omega1 arc // not of unit length
	eps    float64
	unitM  float64 // b A1: metres per radian of τ
	b11    float64 // waves of the distance integral at the start
	tau1   arc
	revert coeffs  // C'1
	a3f    float64 // -f A3 sin α0: longitude per radian of σ that ω has not
	wave3  coeffs  // C3
	b31    float64 // waves of the longitude integral at the start
}

// LineFrom is the geodesic that leaves a towards bearing. If an argument is
// not finite or the latitude beyond 90 degrees, everything asked of it is NaN.
func LineFrom(a Position, bearing TrueDeg) Geodesic {
	lat, ok := latitude(a)
	if !ok || !finite(float64(a.Lng)) || !finite(float64(bearing)) {
		return Geodesic{start: Position{s1.Angle(nan), s1.Angle(nan)}, unitM: nan}
	}
	return geodesicFrom(a, lat, arcOfDeg(float64(bearing)))
}

// geodesicFrom sets the geodesic up (Karney, section 3: 5 to 12).
func geodesicFrom(a Position, lat float64, alpha1 arc) Geodesic {
	beta1 := reduced(coarsen(lat))
	g := Geodesic{start: a, alpha0: node(alpha1, beta1)}
	g.sig1 = arc{beta1.sin, beta1.cos * alpha1.cos}
	if g.sig1 == (arc{}) { // along the equator every point is a node
		g.sig1.cos = 1
	}
	g.omega1 = arc{g.alpha0.sin * g.sig1.sin, g.sig1.cos}
	g.sig1 = phase(g.sig1.sin, g.sig1.cos)
	g.eps = expansion(secondEccSq * g.alpha0.cos * g.alpha0.cos)

	wave1 := c1(g.eps)
	g.unitM = semiMinorM * a1(g.eps)
	g.b11 = wave1.at(g.sig1)
	g.tau1 = g.sig1.plus(arcOf(g.b11))
	g.revert = c1Reverted(g.eps)
	g.a3f = -flattening * g.alpha0.sin * a3(g.eps)
	g.wave3 = c3(g.eps)
	g.b31 = g.wave3.at(g.sig1)
	return g
}

// node is the azimuth at the node of a geodesic (Karney 5 and 10).
func node(alpha, beta arc) arc {
	side := alpha.sin * beta.sin
	return arc{alpha.sin * beta.cos, math.Sqrt(alpha.cos*alpha.cos + side*side)}
}

// Start is where the geodesic starts.
func (g *Geodesic) Start() Position { return g.start }

// At is the position rangeM metres along, and the bearing there, going on.
// See [Direct].
func (g *Geodesic) At(rangeM float64) (Position, TrueDeg) {
	p, alpha := g.at(rangeM)
	return p, alpha.bearing()
}

// at solves the direct problem (Karney, section 3: 7, 20, 8, 11 to 14). The
// wave of the start is put back, so that a range of 0 returns to the start.
func (g *Geodesic) at(rangeM float64) (Position, arc) {
	tau12 := rangeM / g.unitM
	if !finite(tau12) {
		return Position{s1.Angle(nan), s1.Angle(nan)}, arc{nan, nan}
	}
	sig12 := tau12 + g.revert.at(g.tau1.plus(arcOf(tau12))) + g.b11
	sig2 := g.sig1.plus(arcOf(sig12))

	beta2 := arc{g.alpha0.cos * sig2.sin, math.Hypot(g.alpha0.sin, g.alpha0.cos*sig2.cos)}
	if beta2.cos == 0 { // at a pole, on the meridian
		beta2.cos, sig2.cos = tiny, tiny
	}
	omega2 := arc{g.alpha0.sin * sig2.sin, sig2.cos}
	omega12 := omega2.minus(g.omega1).radians()
	lam12 := omega12 + g.a3f*(sig12+g.wave3.at(sig2)-g.b31)

	lat := math.Atan2(beta2.sin, axisRatio*beta2.cos)
	lon := normLonRad(float64(g.start.Lng) + lam12)
	alpha2 := phase(g.alpha0.sin, g.alpha0.cos*sig2.cos)
	return Position{s1.Angle(lat), s1.Angle(lon)}, alpha2
}
