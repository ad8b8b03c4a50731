package turn

import (
	"math"

	"wakeback/drift/nav"
)

// helmsman lays helm in proportion to what the heading is off, less what the
// swing will bring by itself.
func helmsman(course nav.TrueDeg, s State, m Model) Helm {
	off := course.Minus(nav.True(s.HeadingDeg)) - s.RateDegS*m.LagS
	const fullAtDeg = 30 // hard over from 30 degrees off; our choice
	return Helm(clamp(off/fullAtDeg, 1))
}

// steerer remembers what was advised last, so that advice does not waver.
type steerer struct {
	model   Model
	turning Side
	open    bool
	held    nav.Opt[nav.TrueDeg] // the heading held while the range opens
	shown   nav.Opt[nav.TrueDeg]
}

// Our choices. A turn is ordered from beginTurnDeg off and left at endTurnDeg;
// a heading shown stays until the one wanted is steadyDeg from it; near astern,
// beyond asternDeg, the side once chosen stays.
const (
	beginTurnDeg = 12
	endTurnDeg   = 5
	steadyDeg    = 3
	asternDeg    = 120
	tightPart    = 0.9  // of the turning circle: what lies inside cannot be turned at
	backLeadM    = 150  // ahead along the old track, at least, for coming back onto it
	backMaxDeg   = 30   // off the old track at most
	leadMaxDeg   = 30.0 // for leeway
)

// steered is the advice once the orders are done: steer at the person, or back
// along the old track.
func (l *Live) steered(a *Advice, rangeM, relative float64) {
	if !l.begun.Back {
		l.watch.Add(rangeM, l.c.Model.RadiusM)
		l.cue(a, rangeM, relative)
		switch {
		case rangeM < math.Max(alongsideM, l.begun.LengthM.Or(0)/2):
			a.Code = Alongside
			return
		case l.still:
			a.Code = StoppedNear
			return
		}
	}
	want := l.wanted(rangeM, relative)
	l.steer.advise(a, want, l.est, rangeM, relative, !l.begun.Back)
	if !a.Next.IsSet() && !l.begun.Back && a.Cue == "" {
		in := (rangeM - l.wayOffM()) / math.Max(l.est.SpeedMs, 0.5)
		a.Next = nav.Some(Next{Code: WayOff, InS: nav.Some(in)})
	}
}

// lengthM is her length, or what her turning circle says of it: the default of
// a profile, two lengths to a radius.
func (l *Live) lengthM() float64 { return l.begun.LengthM.Or(l.trialM / 2) }

// wayOffM is the range at which way is to be taken off.
func (l *Live) wayOffM() float64 { return l.begun.StoppingM.Or(stopLengths * l.lengthM()) }

// cue is what the engine is to do: way off with the person ahead, out of gear
// near them on whatever side.
func (l *Live) cue(a *Advice, rangeM, relative float64) {
	due := Approach{WayOffM: l.wayOffM(), NeutralM: neutralLengths * l.lengthM()}.cue(rangeM)
	if due == Neutral || due == WayOff && math.Abs(relative) < 90 {
		a.Cue = due
	}
}

// wanted is the heading that leads to the person, allowing for their leeway,
// or back along the old track and onto it.
func (l *Live) wanted(rangeM, relative float64) nav.TrueDeg {
	if l.begun.Back {
		recip := l.c.Heading.Reciprocal()
		sin, cos := math.Sincos(float64(recip) * math.Pi / 180)
		cross := l.est.EastM*cos - l.est.NorthM*sin // positive to the right of the way back
		lead := math.Max(backLeadM, 4*l.c.Model.RadiusM)
		return recip.Add(clamp(-math.Atan2(cross, lead)*180/math.Pi, backMaxDeg))
	}
	bearing := nav.True(l.est.HeadingDeg + relative)
	sin, cos := math.Sincos(float64(bearing) * math.Pi / 180)
	across := l.c.PersonDrift.EastMs*cos - l.c.PersonDrift.NorthMs*sin
	ratio := across / math.Max(l.est.SpeedMs, 0.5)
	return bearing.Add(clamp(math.Asin(clamp(ratio, 1))*180/math.Pi, leadMaxDeg))
}

func (s *steerer) advise(a *Advice, want nav.TrueDeg, est State, rangeM, relative float64, atThem bool) {
	if atThem && s.opening(est, rangeM, relative) {
		a.Code, a.Steer = OpenRange, s.held
		s.turning = Unknown
		a.Next = nav.Some(Next{Code: TurnAtThem, InS: nav.Some(math.Max(0, (s.wideM()-rangeM)/math.Max(est.SpeedMs, 0.5)))})
		return
	}
	if shown, ok := s.shown.Get(); !ok || math.Abs(want.Minus(shown)) > steadyDeg {
		s.shown = nav.Some(want)
	}
	a.Steer = s.shown
	a.Turn = s.turn(s.shown.Or(want).Minus(nav.True(est.HeadingDeg + est.RateDegS*s.model.answersS())))
	a.Code = ComeTo
	if a.Turn == Unknown {
		a.Code = Steady
	}
}

// wideM is the range at which a person astern can be turned at.
func (s *steerer) wideM() float64 { return wideRadii * s.model.RadiusM }

// opening reports whether the range has to be opened first: the person lies
// inside the turning circle on their side, or abaft the beam and too near.
func (s *steerer) opening(est State, rangeM, relative float64) bool {
	r := s.model.RadiusM
	sin, cos := math.Sincos(relative * math.Pi / 180)
	inside := math.Hypot(rangeM*math.Abs(sin)-r, rangeM*cos) < tightPart*r
	abaft := math.Abs(relative) > 90
	switch {
	case s.open:
		s.open = rangeM < s.wideM() && (abaft || inside)
	case inside && abaft, abaft && rangeM < 2*r:
		s.open = true
		s.held = nav.Some(nav.True(est.HeadingDeg))
	}
	return s.open
}

// turn is the way to turn for a heading that is off by so many degrees, with
// the last answer kept in doubt.
func (s *steerer) turn(off float64) Side {
	switch {
	case s.turning == Unknown && math.Abs(off) > beginTurnDeg:
		s.turning = sideOf(off)
	case s.turning != Unknown && math.Abs(off) > asternDeg:
		// nearly astern: either way is as long, so go on
	case s.turning != Unknown && off*float64(s.turning) < endTurnDeg:
		s.turning = Unknown
	}
	return s.turning
}
