package nav

import "math"

// Offtrack says where a point lies from a geodesic.
type Offtrack struct {
	CrossM float64 // shortest distance from the geodesic, positive to the right of it
	AlongM float64 // from the geodesic's start to the foot of that distance; negative behind the start
}

// Ends of the search for the foot, our choice: each step roughly squares the
// error, so that 5 are the rule; the positions are held in steps of 3e-9 m,
// so that steps of 1e-9 m mean nothing more; and from 1e-5 m on the search
// also ends when the steps stop shrinking, because only rounding is left.
const (
	footSteps  = 30
	footFloorM = 1e-9
	footNoiseM = 1e-5
)

// Offtrack measures p against the geodesic, which reaches without end in both
// directions from its start. The foot is where the line to p leaves the
// geodesic at a right angle, on the ellipsoid.
//
// CrossM is good to 1e-7 m, AlongM to 1e-7 m over the scale of the fan of
// perpendiculars there, which is about the cosine of CrossM as an arc: 1e-7 m
// within some 1000 km of the geodesic, twice that at 6700 km.
//
// The nearest point is unique while p is well within a quarter of the
// circumference (10,000 km) of the geodesic and AlongM within half the
// circumference (20,000 km); elsewhere the foot is a right angle still, but
// another one may be nearer: geodesics do not close, and pass near any point
// again on their later rounds. At 10,000 km, where all points of the geodesic
// are about equally far, AlongM is any one of them.
//
// A p that coincides with the foot has a CrossM of 0. What is not finite, or a
// latitude beyond 90 degrees, gives NaN for both.
func (g *Geodesic) Offtrack(p Position) Offtrack {
	o := Offtrack{}
	lastStep := math.Inf(1)
	for range footSteps {
		here, alpha := g.at(o.AlongM)
		to := solveInverse(here, p)
		if math.IsNaN(to.rangeM) {
			return Offtrack{nan, nan}
		}
		turn := to.azi1.minus(alpha)
		o.CrossM = signedCross(to.rangeM, turn)
		step := footStep(to, turn)
		o.AlongM += step
		size := math.Abs(step)
		if size < footFloorM || size < footNoiseM && size >= lastStep/2 {
			break
		}
		lastStep = size
	}
	return o
}

// signedCross is a distance with the sign of the side it is on.
func signedCross(rangeM float64, turn arc) float64 {
	if rangeM < coincideM {
		return 0
	}
	if turn.sin < 0 {
		return -rangeM
	}
	return rangeM
}

// footStep is how far the foot lies on, seen from a point of the geodesic from
// which p bears turn off the way ahead. On a sphere of radius R it is exact:
// Napier's rule tan(step/R) = tan(r/R) cos(turn), with the reduced length m for
// R sin(r/R) and the scale M for cos(r/R). Near the foot it becomes cos(turn)
// m/M, which is Newton's step, because the circle around p has the curvature
// M/m there (Karney, section 3, for m and M).
func footStep(to solution, turn arc) float64 {
	return semiMajorM * math.Atan2(to.reducedM*turn.cos, semiMajorM*to.scale12)
}
