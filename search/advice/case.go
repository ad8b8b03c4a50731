package advice

import (
	"math"
	"time"

	"wakeback/drift"
	"wakeback/drift/nav"
	"wakeback/drift/weather"
	"wakeback/search/incident"
)

// Errors of a start, 95 in 100. A receiver that does not state its error
// counts as 15 m: about twice the 8 m of the GPS Standard Positioning Service
// Performance Standard (5th ed., 2020; from memory), for the way from the
// aerial to the rail. The press comes late by reactionS; our choice, half of
// the ten seconds that search planning commonly allows, because people also
// move the mark back.
const (
	receiverErrorM = 15
	beaconErrorM   = 30
	reactionS      = 5
)

// CaseOf is the drift case of one person, and what it starts from: "beacon",
// "mark" or "window". It is absent for a person aboard and for one whose place
// of the fall is not known.
func CaseOf(s incident.State, p incident.PersonState) (c drift.Case, basis string, ok bool) {
	if p.Status == incident.IsAboard {
		return drift.Case{}, "", false
	}
	if c, basis, ok = startOf(s, p); !ok {
		return drift.Case{}, "", false
	}
	c.Class = classOf(p)
	c.Winds, c.Currents = Winds(s), Currents(s)
	return c, basis, true
}

// startOf is where and when the drift begins: the newest report of a beacon,
// else the working mark, else the stretch of track of one not seen to fall.
func startOf(s incident.State, p incident.PersonState) (c drift.Case, basis string, ok bool) {
	if b, ok := p.Beacon.Get(); ok {
		c.Start = drift.Start{Position: b.Position, Error95M: nav.Some[float64](beaconErrorM)}
		c.FellFrom, c.FellTo = b.At, b.At
		return c, "beacon", true
	}
	if m, ok := workingMark(s, p); ok {
		place, ok := m.Place.Get()
		if !ok {
			return c, "", false
		}
		c.Start = drift.Start{Position: place.Position, Error95M: nav.Some(markErrorM(m, place))}
		c.FellFrom, c.FellTo = m.FellAt, m.FellAt
		return c, "mark", true
	}
	w, okWindow := p.Window.Get()
	if !okWindow || len(p.Path) < 2 {
		return c, "", false
	}
	var path nav.Track
	for _, pt := range p.Path {
		path.Add(nav.Fix{At: pt.At, Position: pt.Position})
	}
	c.Start = drift.Start{Path: path, Error95M: nav.Some[float64](receiverErrorM)}
	c.FellFrom, c.FellTo = w.From, w.To
	return c, "window", true
}

func markErrorM(m incident.Mark, place incident.Place) float64 {
	reaction := m.SogKn.Or(0) * nav.MsPerKn * reactionS
	return math.Hypot(place.ErrorM.Or(receiverErrorM), reaction)
}

// classOf is the leeway class chosen, or the one of a person of whom nothing
// more is known: also for a class that this program does not have.
func classOf(p incident.PersonState) drift.Class {
	if c, err := drift.ClassByID(p.Object); err == nil {
		return c
	}
	c, err := drift.ClassByID(drift.DefaultClass)
	if err != nil {
		panic("advice: the table of leeway lacks its default class: " + err.Error())
	}
	return c
}

// Winds are the winds of the log as a history.
func Winds(s incident.State) weather.History {
	h, _ := weather.NewWinds()
	for _, w := range s.Winds {
		// The log checked what it took; one it could not check is left out.
		_ = h.Add(said(w.Said, w.ObservedBy, nav.BlowingFrom(w.FromDeg, w.SpeedKn), w.SpeedSdKn))
	}
	return h
}

// Currents are the currents of the log as a history.
func Currents(s incident.State) weather.History {
	h, _ := weather.NewCurrents()
	for _, c := range s.Currents {
		_ = h.Add(said(c.Said, c.ObservedBy, nav.Towards(c.SetDeg, c.DriftKn), c.DriftSd))
	}
	return h
}

func said(who incident.Said, by incident.ObservedBy, v nav.Velocity, sdKn float64) weather.Sample {
	s := weather.Sample{
		From: by.From.Or(who.At), Velocity: v, Source: weather.Source(by.Source), Name: by.Name, Said: who.At,
	}
	if s.Name == "" {
		s.Name = who.By
	}
	if sdKn > 0 {
		s.SDMs = nav.Some(sdKn * nav.MsPerKn)
	}
	return s
}

// fellAfter guards against a mark in the future: nothing drifts backwards.
func fellAfter(from, now time.Time) time.Time {
	if now.Before(from) {
		return from
	}
	return now
}
