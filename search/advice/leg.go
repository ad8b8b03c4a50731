package advice

import (
	"time"

	"wakeback/drift/nav"
	"wakeback/search/incident"
	"wakeback/search/pattern"
)

// LegSeen is the leg being steered: where the vessel is on it and what to
// steer. Course is in the datum frame, steer through the water.
type LegSeen struct {
	Search       incident.EventID         `json:"search"`
	Leg          int                      `json:"leg"` // from 1
	Of           int                      `json:"of"`
	Kind         string                   `json:"kind"`
	Paused       bool                     `json:"paused,omitempty"`
	CourseDeg    nav.TrueDeg              `json:"course_deg"`
	SteerDeg     nav.Opt[nav.TrueDeg]     `json:"steer_deg"`
	SteerMagDeg  nav.Opt[nav.MagneticDeg] `json:"steer_mag_deg"`
	CrossM       nav.Opt[float64]         `json:"cross_m"` // off the leg, positive to the right of it
	ToGoM        nav.Opt[float64]         `json:"to_go_m"`
	TurnInS      nav.Opt[float64]         `json:"turn_in_s"`
	NextSteerDeg nav.Opt[nav.TrueDeg]     `json:"next_steer_deg"`
	NextTurnDeg  nav.Opt[float64]         `json:"next_turn_deg"` // positive to starboard
	Done         bool                     `json:"done,omitempty"`
	// From and To are where the leg lies over the ground now: it rides along.
	From nav.Position `json:"from"`
	To   nav.Position `json:"to"`
	// Note says why there is nothing to steer.
	Note string `json:"note,omitempty"`
}

// PlanOf is a laid search as a plan that can be steered.
func PlanOf(s incident.SearchLaid) pattern.Plan {
	p := pattern.Plan{
		Datum: s.Datum, Begin: s.Begin,
		Water: pattern.Water{SpeedKn: s.SpeedKn, Current: s.Current.Velocity(), DatumDrift: s.DatumDrift.Velocity()},
	}
	for _, l := range s.Legs {
		p.Legs = append(p.Legs, pattern.Leg{
			Kind: pattern.LegKind(l.Kind), Course: l.CourseDeg, LengthM: l.LengthM, From: l.From, To: l.To,
		})
	}
	return p
}

// running is the search that is steered now: the newest of the own vessel that
// runs or is paused.
func running(s incident.State) (incident.Search, bool) {
	for i := len(s.Searches) - 1; i >= 0; i-- {
		r := s.Searches[i]
		if r.Vessel == "" && r.Leg >= 1 && (r.Status == incident.SearchRunning || r.Status == incident.SearchPaused) {
			return r, true
		}
	}
	return incident.Search{}, false
}

// leg fills in the leg being steered, and makes it the thing to do while
// nobody is in sight.
func (f *Frame) leg(in Input, p incident.PersonState) {
	s, ok := running(in.State)
	if !ok || p.Status == incident.IsAboard || p.Status == incident.Alongside {
		return
	}
	plan := PlanOf(s.SearchLaid)
	n := s.Leg - 1
	l := LegSeen{
		Search: s.Event, Leg: s.Leg, Of: len(plan.Legs), Kind: string(plan.Legs[n].Kind),
		Paused: s.Status == incident.SearchPaused, CourseDeg: plan.Legs[n].Course,
	}
	l.From, l.To = plan.LegOverGround(n, in.Now)
	f.next(&l, plan, n)
	if fix, ok := f.present(in); ok {
		f.onLeg(&l, plan, n, fix.Position, in.Now)
	} else {
		l.Note = "own position unknown: steer by heading and time"
		if h, _, err := plan.Water.Steer(l.CourseDeg); err == nil {
			l.SteerDeg = nav.Some(h)
		}
	}
	if steer, ok := l.SteerDeg.Get(); ok {
		if v, ok := f.VariationDeg.Get(); ok {
			l.SteerMagDeg = nav.Some(steer.Magnetic(v))
		}
		if !l.Paused && !p.InSight {
			f.Do = f.legOrder(steer)
		}
	}
	f.Leg = nav.Some(l)
}

func (f *Frame) onLeg(l *LegSeen, plan pattern.Plan, n int, own nav.Position, now time.Time) {
	g, err := plan.Guide(n, own, now, 0)
	if err != nil {
		l.Note = err.Error()
		return
	}
	l.SteerDeg, l.CrossM, l.ToGoM = nav.Some(g.Steer), nav.Some(g.CrossM), nav.Some(g.ToGoM)
	l.TurnInS, l.Done = g.TurnInS, g.Done
}

// next fills in the turn at the end of the leg.
func (f *Frame) next(l *LegSeen, plan pattern.Plan, n int) {
	if n+1 >= len(plan.Legs) {
		return
	}
	now, _, errNow := plan.Water.Steer(plan.Legs[n].Course)
	then, _, errThen := plan.Water.Steer(plan.Legs[n+1].Course)
	if errNow == nil && errThen == nil {
		l.NextSteerDeg, l.NextTurnDeg = nav.Some(then), nav.Some(then.Minus(now))
	}
}

// legOrder is the order to steer a leg.
func (f *Frame) legOrder(steer nav.TrueDeg) Do {
	d := Do{Code: SteerLeg, BearingDeg: nav.Some(steer)}
	if h, ok := f.HeadingDeg.Get(); ok {
		rel := steer.RelativeTo(h)
		d.Relative, d.Way = nav.Some(rel), way(rel)
	}
	return d
}
