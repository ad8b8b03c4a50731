package sky

import (
	"math"

	"wakeback/drift/nav"
)

const (
	degPerRad = 180 / math.Pi
	radPerDeg = math.Pi / 180
)

// The ellipsoid of WGS 84 (NGA.STND.0036) and the reference radius of the
// model (WMM technical report), in km.
const (
	wgs84AKm     = 6378.137
	wgs84F       = 1 / 298.257223563
	wgs84E2      = wgs84F * (2 - wgs84F)
	wmmReference = 6371.2
)

// field is a magnetic vector in nT, in the level frame of the ellipsoid.
type field struct {
	north, east, down float64
}

// fieldAt sums the model at p, altKm above the ellipsoid, years after the
// epoch. The formulas are those of the WMM technical report, chapter 1: field
// in geocentric coordinates, then turned into the ellipsoid's level frame.
func fieldAt(p nav.Position, altKm, years float64) field {
	sinLat, cosLat := math.Sincos(p.Lat.Radians())
	sinLon, cosLon := math.Sincos(p.Lng.Radians())

	// Geodetic to geocentric. rho is the distance from the axis.
	primeVertical := wgs84AKm / math.Sqrt(1-wgs84E2*sinLat*sinLat)
	rho := (primeVertical + altKm) * cosLat
	z := (primeVertical*(1-wgs84E2) + altKm) * sinLat
	r := math.Hypot(rho, z)

	s := newSeries(z/r, rho/r, wmmReference/r, years)
	s.addZonal()
	sinM, cosM := 0.0, 1.0
	for m := 1; m <= wmmDegree; m++ {
		sinM, cosM = sinM*cosLon+cosM*sinLon, cosM*cosLon-sinM*sinLon
		s.addOrder(m, sinM, cosM)
	}

	// The angle from the geodetic vertical to the geocentric one.
	sinTurn := s.cosTheta*cosLat - s.sinTheta*sinLat
	cosTurn := s.sinTheta*cosLat + s.cosTheta*sinLat
	return field{
		north: s.north*cosTurn - s.down*sinTurn,
		east:  s.east,
		down:  s.north*sinTurn + s.down*cosTurn,
	}
}

// series is the sum in progress, in the geocentric frame. theta is the
// geocentric colatitude.
//
// Instead of the Legendre functions P of order m > 0 it carries q = P/sin
// theta, which the same recursion yields; so nothing is ever divided by sin
// theta and the poles are points like others.
type series struct {
	cosTheta, sinTheta float64
	years              float64
	ratio              [wmmDegree + 1]float64 // (reference/r)^(n+2) for degree n
	diagonal           float64                // q of degree and order m, the last order added
	north, east, down  float64
}

func newSeries(cosTheta, sinTheta, ratio, years float64) series {
	s := series{cosTheta: cosTheta, sinTheta: sinTheta, years: years}
	s.ratio[0] = ratio * ratio
	for n := 1; n <= wmmDegree; n++ {
		s.ratio[n] = s.ratio[n-1] * ratio
	}
	return s
}

// coefficients of degree n and order m at the time asked for.
func (s *series) coefficients(n, m int) (g, h float64) {
	c := &wmmCoefficients[n*(n+1)/2+m-1] // rows before degree n: 2+3+...+n
	return c.g + s.years*c.gDot, c.h + s.years*c.hDot
}

// addZonal adds order 0 to the part straight down. Its part to the north needs
// the functions of order 1 and is added with them.
func (s *series) addZonal() {
	before, last := 0.0, 1.0 // P of degrees n-2, n-1
	for n := 1; n <= wmmDegree; n++ {
		fn := float64(n)
		legendre := ((2*fn-1)*s.cosTheta*last - (fn-1)*before) / fn
		g, _ := s.coefficients(n, 0)
		s.down -= (fn + 1) * s.ratio[n] * g * legendre
		before, last = last, legendre
	}
}

// addOrder adds all degrees of order m > 0, orders in ascending turn.
func (s *series) addOrder(m int, sinM, cosM float64) {
	fm := float64(m)
	if m == 1 {
		s.diagonal = 1
	} else {
		s.diagonal *= math.Sqrt((2*fm-1)/(2*fm)) * s.sinTheta
	}
	before, last := 0.0, 0.0 // q of degrees n-2, n-1
	rootLast := 0.0          // sqrt((n-1)² - m²)
	for n := m; n <= wmmDegree; n++ {
		fn := float64(n)
		root := math.Sqrt(fn*fn - fm*fm)
		q := s.diagonal
		if n > m {
			q = ((2*fn-1)*s.cosTheta*last - rootLast*before) / root
		}
		slope := fn*s.cosTheta*q - root*last // dP/dtheta
		g, h := s.coefficients(n, m)
		along := g*cosM + h*sinM
		s.north += s.ratio[n] * along * slope
		s.east += s.ratio[n] * fm * (g*sinM - h*cosM) * q
		s.down -= (fn + 1) * s.ratio[n] * along * q * s.sinTheta
		if m == 1 {
			// dP/dtheta of order 0 is -sqrt(n(n+1)/2) P of order 1.
			zonal, _ := s.coefficients(n, 0)
			s.north -= s.ratio[n] * zonal * math.Sqrt(fn*(fn+1)/2) * q * s.sinTheta
		}
		before, last, rootLast = last, q, root
	}
}
