package advice

import (
	"math"
	"slices"
	"time"

	"wakeback/drift/nav"
	"wakeback/search/incident"
)

// sample is an observation that holds from a moment on.
type sample struct {
	from time.Time
	v    nav.Velocity
}

func at(s incident.Said, by incident.ObservedBy) time.Time { return by.From.Or(s.At) }

// piecewise adds up a velocity over the pieces between its samples; before the
// first sample the first holds.
func piecewise(samples []sample, from, to time.Time, f func(nav.Velocity) nav.Velocity) nav.Offset {
	if len(samples) == 0 {
		return f(nav.Velocity{}).For(to.Sub(from))
	}
	slices.SortStableFunc(samples, func(a, b sample) int { return a.from.Compare(b.from) })
	var sum nav.Offset
	for i, s := range samples {
		begin, end := s.from, to
		if i == 0 || begin.Before(from) {
			begin = from
		}
		if i+1 < len(samples) && samples[i+1].from.Before(end) {
			end = samples[i+1].from
		}
		if end.After(begin) {
			sum = sum.Add(f(s.v).For(end.Sub(begin)))
		}
	}
	return sum
}

// drifted carries a start on by current and leeway.
func drifted(in Input, p incident.PersonState, st start) Datum {
	to := in.Now
	if to.Before(st.from) {
		to = st.from
	}
	var winds, currents []sample
	for _, w := range in.State.Winds {
		winds = append(winds, sample{at(w.Said, w.ObservedBy), nav.BlowingFrom(w.FromDeg, w.SpeedKn)})
	}
	for _, c := range in.State.Currents {
		currents = append(currents, sample{at(c.Said, c.ObservedBy), nav.Towards(c.SetDeg, c.DriftKn)})
	}
	moved := piecewise(winds, st.from, to, leeway).
		Add(piecewise(currents, st.from, to, func(v nav.Velocity) nav.Velocity { return v }))
	age := to.Sub(st.from).Seconds()
	d := Datum{
		Position: st.at.Shift(moved), AgeS: age, MovedM: moved.RangeM(), MovedTowards: moved.Direction(),
		ErrorM: math.Hypot(st.errorM, unknownDriftKn*nav.MsPerKn*age*to95/1.17741), Object: p.Object, Basis: st.basis,
	}
	now := nav.Velocity{}
	if n := len(winds); n > 0 {
		last := slices.MaxFunc(in.State.Winds, func(a, b incident.WindSaid) int { return a.At.Compare(b.At) })
		d.WindFromDeg, d.WindKn, d.WindBy = nav.Some(last.FromDeg), nav.Some(last.SpeedKn), last.Source
		d.WindAt = nav.Some(last.At)
		now = now.Add(leeway(nav.BlowingFrom(last.FromDeg, last.SpeedKn)))
	}
	if n := len(currents); n > 0 {
		last := slices.MaxFunc(in.State.Currents, func(a, b incident.CurrentSaid) int { return a.At.Compare(b.At) })
		d.CurrentSetDeg, d.CurrentDriftKn, d.CurrentBy = nav.Some(last.SetDeg), nav.Some(last.DriftKn), last.Source
		d.CurrentAt = nav.Some(last.At)
		now = now.Add(nav.Towards(last.SetDeg, last.DriftKn))
	}
	d.DriftKn, d.DriftTowards = now.SpeedKn(), now.Direction()
	return d
}

// unknownDriftKn is the probable error of a drift of which nothing is known
// (IAMSAR Manual vol. II, appendix K; from memory).
const unknownDriftKn = 0.3

// leeway of a person of whom nothing is known: 1.1 % of the wind and 0.07 kn
// (Allen and Plourde 1999, CG-D-08-99, table 8-1; from memory).
func leeway(wind nav.Velocity) nav.Velocity {
	dir, ok := wind.Direction().Get()
	if !ok {
		return nav.Velocity{}
	}
	return nav.Towards(dir, wind.SpeedKn()*0.011+0.07)
}
