package demo

import (
	"math"
	"time"

	"wakeback/drift/nav"
	"wakeback/search/advice"
	"wakeback/search/incident"
)

// What the invented crew does, all our choice.
const (
	reaction = 8 * time.Second // from the mark to the helm going over
	sightM   = 60.0            // how near a head is seen in these waves
	besideM  = 5.0             // near enough to reach and hold
	slowKn   = 1.2             // the least speed she steers at
)

// crew steers the vessel back.
type crew struct {
	incident incident.IncidentID
	since    time.Time // when they heard of it
	beside   bool      // they have hold of the person
}

// turnTo decides on the helm from the newest incidents and what the
// instruments say. Without a live incident she goes on her way.
func (c *crew) turnTo(w *world, states []incident.State, own advice.Own) {
	st, live := advice.Choose(states)
	if !live || len(inWater(st)) == 0 {
		*c = crew{}
		w.underWay()
		return
	}
	if c.incident != st.ID {
		*c = crew{incident: st.ID, since: w.at}
	}
	if w.at.Sub(c.since) < reaction {
		return
	}
	if p, ok := w.nearest(st.ID); ok {
		to := w.to(p.place)
		if c.beside = to.RangeM() < besideM; c.beside {
			p.held = nav.Some(to) // and way off
			w.helm = helm{course: nav.Some(w.hull.heading())}
			return
		}
		if to.RangeM() < sightM {
			c.approach(w, to)
			return
		}
	}
	c.follow(w, advice.Steer(advice.Input{Now: w.at, State: st, Own: own}))
}

// follow steers by the frame that the phones show.
func (c *crew) follow(w *world, f advice.Frame) {
	bearing, ok := f.Do.BearingDeg.Get()
	if !ok {
		bearing, ok = f.BearingDeg.Get()
	}
	rangeM, near := f.RangeM.Get()
	switch {
	case !ok:
		w.helm.speedKn = cruiseKn
	case f.Do.Code == advice.SteerLeg || !near:
		w.helm = helm{course: nav.Some(bearing), speedKn: cruiseKn}
	default:
		c.approach(w, nav.Along(bearing, rangeM))
	}
}

// approach brings her to a place: she opens the range while the place is
// inside her turning circle, turns, and takes the way off in time.
func (c *crew) approach(w *world, to nav.Offset) {
	bearing, rangeM := nav.True(bearingDeg(to)), to.RangeM()
	off := math.Abs(bearing.Minus(w.hull.heading()))
	switch {
	case off > 25 && inside(w.hull, to):
		w.helm = helm{course: nav.Some(w.hull.heading()), speedKn: cruiseKn / 2}
	case off > 60:
		w.helm = helm{course: nav.Some(bearing), speedKn: cruiseKn}
	default:
		w.helm = helm{course: nav.Some(bearing), speedKn: max(slowKn, min(cruiseKn, rangeM/10))}
	}
}

// inWater are the persons that still have to be brought aboard.
func inWater(s incident.State) []incident.PersonNo {
	var nos []incident.PersonNo
	for _, p := range s.Persons {
		if p.Status != incident.IsAboard {
			nos = append(nos, p.No)
		}
	}
	return nos
}

// nearest is the person of an incident that is nearest to the vessel.
func (w *world) nearest(id incident.IncidentID) (*person, bool) {
	var best *person
	for k, p := range w.persons {
		if k.incident == id && (best == nil || w.to(p.place).RangeM() < w.to(best.place).RangeM()) {
			best = p
		}
	}
	return best, best != nil
}

// mend brings the truth in line with the log: whoever was marked is in the
// water, whoever was brought aboard is not.
func (w *world) mend(states []incident.State) error {
	wanted := make(map[who]bool)
	for _, st := range states {
		if !st.Live() {
			continue
		}
		for _, no := range inWater(st) {
			id := who{st.ID, no}
			wanted[id] = true
			if at, ok := fellAt(st, no); ok && w.persons[id] == nil {
				if err := w.fall(id, at); err != nil {
					return err
				}
			}
		}
	}
	for id := range w.persons {
		if !wanted[id] {
			delete(w.persons, id)
		}
	}
	return nil
}

// fellAt is the moment of a person's first mark.
func fellAt(st incident.State, no incident.PersonNo) (time.Time, bool) {
	for _, m := range st.Marks {
		if m.Person == no && !m.Dismissed.IsSet() {
			return m.At, true
		}
	}
	return time.Time{}, false
}
