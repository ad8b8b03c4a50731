package feed

import (
	"time"

	"wakeback/drift/nav"
)

// Values that follow from readings. A derived value is as old as the oldest of
// what it is made of, and stale when any of that is.

// older marks r as made also of something else.
func older[T, U any](r Reading[T], with Reading[U]) Reading[T] {
	if with.At.Before(r.At) {
		r.At, r.AgeS = with.At, with.AgeS
	}
	r.Stale = r.Stale || with.Stale
	return r
}

// variationReading prefers the caller's model at the last known position to what
// an instrument sent, because instruments send what someone once set, or a model
// of the year they were made.
func (st *state) variationReading(v Vessel, now time.Time) nav.Opt[Reading[nav.VariationDeg]] {
	if p, ok := v.Position.Get(); ok && st.variation != nil {
		if d, ok := st.variation(p.Value, now).Get(); ok {
			// Variation hardly changes over the miles run since an old fix.
			return nav.Some(Reading[nav.VariationDeg]{
				Value: d, At: p.At, AgeS: p.AgeS, Stale: p.AgeS > limitVariation.Seconds(),
				Source: p.Source, Sentence: p.Sentence, Derived: "magnetic model at the last position",
			})
		}
	}
	return reading(st, &st.sentVar, now)
}

// headings gives both headings: each as sent, else one from the other and the
// variation.
func (st *state) headings(v Vessel, now time.Time) (nav.Opt[Reading[nav.TrueDeg]], nav.Opt[Reading[nav.MagneticDeg]]) {
	t, m := reading(st, &st.headingTrue, now), reading(st, &st.headingMag, now)
	variation, ok := v.Variation.Get()
	if !ok {
		return t, m
	}
	tr, hasT := t.Get()
	mr, hasM := m.Get()
	if hasM && (!hasT || tr.Stale && !mr.Stale) {
		t = nav.Some(trueFrom(mr, variation))
	}
	if hasT && (!hasM || mr.Stale && !tr.Stale) {
		m = nav.Some(magneticFrom(tr, variation))
	}
	return t, m
}

const fromVariation = "by variation"

// trueFrom does not take on the age of the variation, which hardly changes, but
// its staleness.
func trueFrom(m Reading[nav.MagneticDeg], v Reading[nav.VariationDeg]) Reading[nav.TrueDeg] {
	return Reading[nav.TrueDeg]{
		Value: m.Value.True(v.Value), At: m.At, AgeS: m.AgeS, Stale: m.Stale || v.Stale,
		Source: m.Source, Sentence: m.Sentence, Derived: fromVariation,
	}
}

func magneticFrom(t Reading[nav.TrueDeg], v Reading[nav.VariationDeg]) Reading[nav.MagneticDeg] {
	return Reading[nav.MagneticDeg]{
		Value: t.Value.Magnetic(v.Value), At: t.At, AgeS: t.AgeS, Stale: t.Stale || v.Stale,
		Source: t.Source, Sentence: t.Sentence, Derived: fromVariation,
	}
}

// wind gives the wind with respect to north: as sent, else from the apparent
// wind with heading and speed through the water, else from the apparent wind
// with heading, course and speed over the ground, else from the talker's own true
// wind and the heading. The first that is fresh is taken; when none is, the first
// there is.
func (st *state) wind(v Vessel, now time.Time) nav.Opt[Reading[Wind]] {
	var best nav.Opt[Reading[Wind]]
	for _, w := range []nav.Opt[Reading[Wind]]{
		reading(st, &st.windNorth, now), windOverWater(v), windOverGround(v), windTurned(v),
	} {
		r, ok := w.Get()
		if ok && !r.Stale {
			return w
		}
		if ok && !best.IsSet() {
			best = w
		}
	}
	return best
}

// windOverWater takes the vessel's motion through the water out of the apparent
// wind. Leeway is neglected: the vessel is taken to go where she points.
func windOverWater(v Vessel) nav.Opt[Reading[Wind]] {
	a, ok1 := v.WindApparent.Get()
	h, ok2 := v.HeadingTrue.Get()
	s, ok3 := v.StwKn.Get()
	if !ok1 || !ok2 || !ok3 {
		return nav.None[Reading[Wind]]()
	}
	w := withoutMotion(a.Value, h.Value, nav.Towards(h.Value, s.Value), OverWater)
	r := windReading(a, w, "apparent wind, heading and speed through water")
	return nav.Some(older(older(r, h), s))
}

func windOverGround(v Vessel) nav.Opt[Reading[Wind]] {
	a, ok1 := v.WindApparent.Get()
	h, ok2 := v.HeadingTrue.Get()
	s, ok3 := v.SogKn.Get()
	c, ok4 := v.CogTrue.Get()
	if !ok1 || !ok2 || !ok3 || !ok4 {
		return nav.None[Reading[Wind]]()
	}
	w := withoutMotion(a.Value, h.Value, nav.Towards(c.Value, s.Value), OverGround)
	r := windReading(a, w, "apparent wind, heading, course and speed over ground")
	return nav.Some(older(older(older(r, h), s), c))
}

// windTurned turns the talker's own true wind by the heading.
func windTurned(v Vessel) nav.Opt[Reading[Wind]] {
	a, ok1 := v.WindRelative.Get()
	h, ok2 := v.HeadingTrue.Get()
	if !ok1 || !ok2 {
		return nav.None[Reading[Wind]]()
	}
	w := Wind{h.Value.Add(float64(a.Value.AngleRelativeDeg)), a.Value.SpeedKn, AsInstrument}
	return nav.Some(older(windReading(a, w, "true wind from the bow and heading"), h))
}

func windReading(a Reading[RelativeWind], w Wind, how string) Reading[Wind] {
	return Reading[Wind]{
		Value: w, At: a.At, AgeS: a.AgeS, Stale: a.Stale, Source: a.Source, Sentence: a.Sentence, Derived: how,
	}
}

// withoutMotion adds the vessel's velocity to that of the air past her.
func withoutMotion(a RelativeWind, heading nav.TrueDeg, vessel nav.Velocity, ref WindReference) Wind {
	past := nav.BlowingFrom(heading.Add(float64(a.AngleRelativeDeg)), a.SpeedKn)
	air := past.Add(vessel)
	towards, ok := air.Direction().Get()
	if !ok {
		return Wind{heading, 0, ref} // calm: it comes from nowhere
	}
	return Wind{towards.Reciprocal(), air.SpeedKn(), ref}
}

// motion is how the vessel moves, from what is fresh at a moment.
func (st *state) motion(now time.Time) nav.Opt[motion] {
	if m, ok := st.motionByWater(now).Get(); ok {
		return nav.Some(m)
	}
	sog, ok1 := freshValue(&st.sog, now).Get()
	cog, ok2 := freshValue(&st.cog, now).Get()
	if ok1 && ok2 {
		return nav.Some(motion{velocity: nav.Towards(cog, sog), basis: ByGround})
	}
	return nav.None[motion]()
}

func (st *state) motionByWater(now time.Time) nav.Opt[motion] {
	stw, ok := freshValue(&st.stw, now).Get()
	if !ok {
		return nav.None[motion]()
	}
	heading, ok := st.freshHeading(now).Get()
	if !ok {
		return nav.None[motion]()
	}
	m := motion{velocity: nav.Towards(heading, stw), basis: ByWater, sigmaCurrentMs: sigmaCurrentKn * nav.MsPerKn}
	if c, ok := freshValue(&st.current, now).Get(); ok {
		m.velocity = m.velocity.Add(nav.Towards(c.SetDeg, c.DriftKn))
		m.sigmaCurrentMs = sigmaToldCurrentKn * nav.MsPerKn
	}
	return nav.Some(m)
}

// freshHeading is the true heading, as sent or by variation.
func (st *state) freshHeading(now time.Time) nav.Opt[nav.TrueDeg] {
	if h, ok := freshValue(&st.headingTrue, now).Get(); ok {
		return nav.Some(h)
	}
	m, ok := freshValue(&st.headingMag, now).Get()
	if !ok {
		return nav.None[nav.TrueDeg]()
	}
	var v Vessel
	v.Position, _, _ = st.positionReading(now)
	d, ok := Fresh(st.variationReading(v, now)).Get()
	if !ok {
		return nav.None[nav.TrueDeg]()
	}
	return nav.Some(m.True(d))
}
