package detect

import "math"

// InverseCube is the chance to see an object passed at a distance abeam of
// xNM on a long straight leg, with a sweep width of widthNM: 1 - exp(-W²/(4 pi
// x²)). Koopman's law of a searcher who looks from a height over an
// unobstructed sea (shape: Eagle, lecture notes "Lateral range curves and
// sweepwidth", 2012; scaled here so that the area under the curve is W).
func InverseCube(xNM, widthNM float64) float64 {
	if widthNM <= 0 {
		return 0
	}
	if xNM == 0 {
		return 1
	}
	return -math.Expm1(-widthNM * widthNM / (4 * math.Pi * xNM * xNM))
}

// Coverage is sweep width over track spacing, of parallel legs.
func Coverage(widthNM, spacingNM float64) float64 { return widthNM / spacingNM }

// CoverageOf is sweep width times track run, over the area: any legs.
func CoverageOf(widthNM, runNM, areaNM2 float64) float64 { return widthNM * runNM / areaNM2 }

// PODParallel is the probability of detection of evenly spaced parallel legs
// under the inverse cube law: erf(sqrt(pi)/2 * C). It holds for good
// conditions and legs that are kept (Koopman; from memory, and re-derived).
func PODParallel(coverage float64) float64 {
	return math.Erf(math.Sqrt(math.Pi) / 2 * max(coverage, 0))
}

// PODRandom is the probability of detection when legs are kept no better than
// at random: 1 - exp(-C) (Koopman, as summarised in search theory courses).
// It is the realistic floor for a small boat in a seaway.
func PODRandom(coverage float64) float64 { return -math.Expm1(-max(coverage, 0)) }

// PODCumulative is the probability of detection after several independent
// searches of the same water for the same object.
func PODCumulative(pods ...float64) float64 {
	missed := 1.0
	for _, p := range pods {
		missed *= 1 - p
	}
	return 1 - missed
}

// PODNeeded is what the next search must reach for a goal together with what
// was reached so far: 1 - (1 - goal)/(1 - so far) (Frost, note of 1998). It is
// nil when the goal is reached.
func PODNeeded(goal, soFar float64) float64 {
	if soFar >= goal {
		return 0
	}
	return 1 - (1-goal)/(1-soFar)
}
