package turn

import (
	"math"

	"wakeback/drift/nav"
)

// move steps the reckoned state on, relative to the person, who is carried by
// their leeway; one current carries both.
func (l *Live) move(h Helm, dt float64) {
	m := l.c.Model
	if l.stage < len(l.phases) && l.phases[l.stage].slow {
		m.SpeedRatio *= slowPart
	}
	l.est = m.step(l.est, h, dt)
	l.est.EastM -= l.c.PersonDrift.EastMs * dt
	l.est.NorthM -= l.c.PersonDrift.NorthMs * dt
}

// coarseStep is a step for advice that is made anew every second: two degrees
// of turn, and a fifth of the shorter lag.
func (m Model) coarseStep() float64 {
	dt := math.Min(m.RadiusM/m.SpeedMs/30, math.Min(m.LagS, m.SpeedLagS)/5)
	return math.Max(stepS, math.Min(1, dt))
}

// predict reckons the state dt seconds on, with the last order obeyed and not
// overshot.
func (l *Live) predict(dt float64) State {
	ahead := *l
	step := l.c.Model.coarseStep()
	for t := math.Min(dt, longestGapS); t > 1e-9; t -= step {
		ahead.move(ahead.presumedHelm(), math.Min(t, step))
	}
	return ahead.est
}

// presumedHelm is the helm of a vessel that does as advised.
func (l *Live) presumedHelm() Helm {
	if l.still {
		return 0
	}
	if l.stage < len(l.phases) {
		ph := l.phases[l.stage]
		if ph.hold || reached(l.est, l.c.Heading, l.side, ph) {
			return helmsman(l.c.Heading.Add(ph.until*float64(l.side)), l.est, l.c.Model)
		}
		if l.stage == 0 && l.sinceS < l.c.Model.OrderDelayS {
			return 0
		}
		return Helm(ph.helm * float64(l.side))
	}
	if steer, ok := l.last.Steer.Get(); ok {
		return helmsman(steer, l.est, l.c.Model)
	}
	return 0
}

// senseHeading takes the heading and speed observed. It reports whether a
// heading was observed at all. A heading is known up to whole turns; the
// reckoned one says which turn it is in.
func (l *Live) senseHeading(o Sensed, was State, dt float64) bool {
	fix, fresh := l.freshFix(o)
	sogKn := nav.None[float64]()
	if fresh {
		sogKn = fix.SogKn
	}
	speedKn := l.est.SpeedMs / nav.MsPerKn
	if v, ok := o.StwKn.Get(); ok && plausibleKn(v) {
		speedKn = v
	} else if v, ok := sogKn.Get(); ok && plausibleKn(v) {
		speedKn = v
	}
	// The model is one of her approach speed: beyond twice that it says nothing.
	speedKn = math.Min(speedKn, 2*l.c.Model.SpeedMs/nav.MsPerKn)
	l.still = speedKn < noWayKn || l.still && speedKn < wayAgainKn
	l.est.SpeedMs = speedKn * nav.MsPerKn

	heading, ok := o.Heading.Get()
	if !ok && fresh && sogKn.Or(0) >= courseFromKn {
		if heading, ok = fix.CogTrue.Get(); ok {
			l.doubt(HeadingByCourse)
		}
	}
	if !ok || !(math.Abs(float64(heading)) <= 720) {
		l.doubt(HeadingByModel)
		return false
	}
	reckoned := l.est
	l.est.HeadingDeg += heading.Minus(nav.True(reckoned.HeadingDeg))
	if dt <= gapS {
		seen := (l.est.HeadingDeg - was.HeadingDeg) / dt
		l.swingDegS += swingPart1s * (seen - l.swingDegS)
		// The rate seen is noisy by the compass over the interval, the rate
		// reckoned by what the helmsman does: each has half a say. Our choice.
		l.est.RateDegS = (seen + reckoned.RateDegS) / 2
	}
	return true
}

// plausibleKn reports whether a speed can be that of a vessel.
func plausibleKn(v float64) bool { return v >= 0 && v <= 100 }

func (l *Live) freshFix(o Sensed) (nav.Fix, bool) {
	fix, ok := o.Fix.Get()
	if !ok || fix.Position.Validate() != nil || math.Abs(o.At.Sub(fix.At).Seconds()) > fixAgeS {
		return nav.Fix{}, false
	}
	return fix, true
}

// sensePosition takes the place relative to the datum, unless it jumped. Both
// are on the ground at one moment, so a current that carries both drops out.
func (l *Live) sensePosition(o Sensed, dt float64) {
	fix, fresh := l.freshFix(o)
	datum, known := o.Datum.Get()
	if !fresh || !known || datum.Validate() != nil {
		l.doubt(PositionByModel)
		return
	}
	at := nav.NewPlane(datum).Offset(fix.Position)
	reckoned := nav.Offset{EastM: l.est.EastM, NorthM: l.est.NorthM}
	first := !l.jump.seen
	off := at.Sub(reckoned)
	switch {
	case !l.jump.accepts(at, reckoned, l.c.Model.SpeedMs, dt):
		l.doubt(PositionJumped)
		return
	case !first && dt <= fixAgeS && off.RangeM() < jumpM:
		at = reckoned.Add(off.Scale(fixPart))
	}
	l.est.EastM, l.est.NorthM = at.EastM, at.NorthM
}

// swingPart1s is the weight of a rate seen: of a compass noisy by 2 degrees it
// leaves about 1 degree a second. Our choice.
const swingPart1s = 0.3

// fixPart is the weight of a fix against the place reckoned from the one
// before: it halves the noise of a receiver from second to second, which
// would else look like a pass or swing the bearing close by, and follows a
// steady difference within some seconds. Our choice.
const fixPart = 0.4

// jumpGate holds back a position that no vessel can have got to since the
// last. It gives way when jumpAgree positions running agree with one another:
// then it was the old ones that were wrong, or the datum was moved.
type jumpGate struct {
	seen  bool
	held  int
	lastM nav.Offset
}

// Our choices: a fix may lie off by jumpM, several times the error of a
// receiver with a free sky, and as far as twice her speed has carried her
// (a current, a sea on the quarter); three in agreement are believed.
const (
	jumpM     = 50
	jumpAgree = 3
)

func (g *jumpGate) accepts(at, reckoned nav.Offset, speedMs, dt float64) bool {
	allowed := jumpM + 2*speedMs*dt
	first := !g.seen
	g.seen = true
	if first || at.Sub(reckoned).RangeM() <= allowed {
		g.held = 0
		return true
	}
	if g.held > 0 && at.Sub(g.lastM).RangeM() <= allowed {
		g.held++
	} else {
		g.held = 1
	}
	g.lastM = at
	if g.held >= jumpAgree {
		g.held = 0
		return true
	}
	return false
}
