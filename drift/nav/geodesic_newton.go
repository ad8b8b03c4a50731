package nav

import "math"

// trial is the geodesic that leaves the start with a trial azimuth, followed
// to the latitude of the end.
type trial struct {
	span
	alpha1, alpha2 arc
	excess         float64 // longitude gone beyond what was wanted: λ12(α1) - λ12
}

// follow runs a trial (Karney, section 4: 5, 45, 10 to 12, 8).
func (pr *problem) follow(alpha1 arc) trial {
	b1, b2 := pr.beta1, pr.beta2
	if b1.sin == 0 && alpha1.cos == 0 {
		alpha1.cos = -tiny // along the equator: meet it again at the far node
	}
	a0 := node(alpha1, b1)
	t := trial{alpha1: alpha1, alpha2: pr.arriving(alpha1, a0)}
	t.dn1, t.dn2 = pr.dn1, pr.dn2
	sig1, sig2 := arc{b1.sin, alpha1.cos * b1.cos}, arc{b2.sin, t.alpha2.cos * b2.cos}
	t.sig1, t.sig2 = phase(sig1.sin, sig1.cos), phase(sig2.sin, sig2.cos)
	t.sig12 = t.sig2.ahead(t.sig1).radians()
	t.eps = expansion(secondEccSq * a0.cos * a0.cos)

	omega1, omega2 := arc{a0.sin * sig1.sin, sig1.cos}, arc{a0.sin * sig2.sin, sig2.cos}
	omega12 := omega2.ahead(omega1)
	lag := flattening * a0.sin * a3(t.eps) * (t.sig12 + t.waves(c3(t.eps)))
	t.excess = omega12.minus(pr.lam.arc).radians() - lag
	return t
}

// arriving is α2, between -90 and 90 degrees (Karney 5 and 45).
func (pr *problem) arriving(alpha1, alpha0 arc) arc {
	b1, b2 := pr.beta1, pr.beta2
	if b2.cos == b1.cos && math.Abs(b2.sin) == -b1.sin {
		return arc{alpha1.sin, math.Abs(alpha1.cos)}
	}
	// cos²β2 - cos²β1, from whichever pair is the smaller and so the better.
	var diff float64
	if b1.cos < -b1.sin {
		diff = (b2.cos - b1.cos) * (b1.cos + b2.cos)
	} else {
		diff = (b1.sin - b2.sin) * (b1.sin + b2.sin)
	}
	along := alpha1.cos * b1.cos
	return arc{alpha0.sin / b2.cos, math.Sqrt(along*along+diff) / b2.cos}
}

// slope is dλ12/dα1 (Karney 46; 47 where the end is a vertex).
func (pr *problem) slope(t *trial) float64 {
	if t.alpha2.cos == 0 {
		return -2 * axisRatio * pr.dn1 / pr.beta1.sin
	}
	return t.reducedLength(t.j12()) * axisRatio / (t.alpha2.cos * pr.beta2.cos)
}

// Ends of the search. Newton's method takes 3 or 4 trials as a rule, and took 6
// at most in 160,000 lines of all sorts; bisection needs one for each bit of
// the azimuth (Karney, section 4).
const (
	newtonSteps = 20
	allSteps    = newtonSteps + 53 + 10
	// Rounding in follow is of this order; our choice.
	excessFloor = float64(epsilon)
	// An azimuth bracketed so closely will get no better; our choice.
	bracketFloor = 200 * epsilon
)

// bracket holds the azimuths between which the answer lies. λ12(α1) has one
// root on (0, π), where it rises through it (Karney, section 4).
type bracket struct{ low, high arc }

// narrow takes a trial for one of the ends.
func (b *bracket) narrow(t *trial, force bool) {
	cot := t.alpha1.cos / t.alpha1.sin
	switch {
	case t.excess > 0 && (force || cot > b.high.cos/b.high.sin):
		b.high = t.alpha1
	case t.excess < 0 && (force || cot < b.low.cos/b.low.sin):
		b.low = t.alpha1
	}
}

// middle halves the bracket, and says whether that is the end.
func (b *bracket) middle() (arc, bool) {
	m := phase(b.low.sin+b.high.sin, b.low.cos+b.high.cos)
	closeTo := func(e arc) bool { return math.Abs(e.sin-m.sin)+math.Abs(e.cos-m.cos) < bracketFloor }
	return m, closeTo(b.low) || closeTo(b.high)
}

// newton finds the azimuth at which the geodesic meets the end (Karney,
// section 4), by Newton's method inside a bracket that is halved instead
// whenever a step would leave the half circle or the steps run out.
func (pr *problem) newton(alpha1 arc) solution {
	b := bracket{low: arc{tiny, 1}, high: arc{tiny, -1}}
	floor, last := excessFloor, false
	for step := 0; ; step++ {
		t := pr.follow(alpha1)
		if last || !(math.Abs(t.excess) >= floor) || step == allSteps {
			found := t.solution(t.alpha1, t.alpha2)
			found.trials = step + 1
			return found
		}
		b.narrow(&t, step > newtonSteps)
		floor = excessFloor
		if next, ok := pr.improve(&t); ok && step < newtonSteps {
			if math.Abs(t.excess) <= 16*excessFloor {
				floor = 8 * excessFloor // what is left next time is but rounding
			}
			alpha1 = next
			continue
		}
		alpha1, last = b.middle()
	}
}

// improve makes Newton's step, if it is one that may be taken.
func (pr *problem) improve(t *trial) (arc, bool) {
	slope := pr.slope(t)
	if !(slope > 0) {
		return arc{}, false
	}
	turn := -t.excess / slope
	if !(math.Abs(turn) < math.Pi) {
		return arc{}, false
	}
	next := t.alpha1.plus(arcOf(turn))
	return phase(next.sin, next.cos), next.sin > 0
}
