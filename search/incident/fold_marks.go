package incident

import (
	"time"

	"wakeback/drift/nav"
)

// marked counts a press. Without a person's number it is for the first; once
// that one is back aboard, a new press is for somebody else, so that one
// recovery never hides another fall.
func (f *folder) marked(e *entry, b *Marked) {
	no, ok := b.Person.Get()
	if !ok {
		no = f.nextPerson()
	}
	m := Mark{
		Said: e.said(), Person: no, FellAt: e.At, Mmsi: b.Mmsi, Side: b.Side,
		SogKn: b.SogKn, CogDeg: b.CogDeg, Heading: b.HeadingDeg, Drill: e.Drill, Test: e.Test,
		ClockErrorMs: e.ClockErrorMs, DeviceAt: e.DeviceAt,
	}
	if pos, ok := b.Position.Get(); ok {
		m.Press = nav.Some(Place{Position: pos, Source: b.Source, ErrorM: b.ErrorM, FixAgeS: b.FixAgeS})
	} else if place, ok := f.placed[e.ID]; ok {
		m.Press = nav.Some(place)
	}
	m.Place = m.carriedOn()
	f.s.Marks = append(f.s.Marks, m)
	f.signs = append(f.signs, sign{at: e.At, device: e.Device, mark: e.ID})
	p := f.personOf(no, e)
	if p.Status == IsMissing || p.Status == IsAboard {
		p.Status, p.StatusAt = InWater, e.At
	}
	for _, waiting := range f.early[e.ID] {
		f.apply(waiting)
	}
}

// waitsFor keeps an event until its mark comes, and reports whether it has to wait.
func (f *folder) waitsFor(mark EventID, e *entry) (index int, waits bool) {
	i := f.markIndex(mark)
	if i < 0 {
		f.early[mark] = append(f.early[mark], e)
	}
	return i, i < 0
}

// nextPerson is the first person who is not aboard again.
func (f *folder) nextPerson() PersonNo {
	no := PersonNo(1)
	for {
		p, ok := f.persons[no]
		if !ok || p.Status != IsAboard {
			return no
		}
		no++
	}
}

func (f *folder) markIndex(id EventID) int {
	for i := range f.s.Marks {
		if f.s.Marks[i].Event == id {
			return i
		}
	}
	return -1
}

// markPlaced gives a mark without a position the first one that was placed.
// It may stand before its mark in the order of the log.
func (f *folder) markPlaced(b *MarkPlaced) {
	if _, ok := f.placed[b.Mark]; ok {
		return
	}
	place := Place{Position: b.Position, Source: b.Source, ErrorM: b.ErrorM, FixAgeS: b.FixAgeS}
	f.placed[b.Mark] = place
	i := f.markIndex(b.Mark)
	if i < 0 || f.s.Marks[i].Press.IsSet() {
		return
	}
	m := &f.s.Marks[i]
	m.Press = nav.Some(place)
	if !m.Place.IsSet() {
		m.Place = m.carriedOn()
	}
}

// oldFix is the age from which a fix is no longer taken for the place of the
// press; our choice: instruments report once a second, so five are missing.
const oldFix = 5.0

// carriedOn is where the press was: the position that came with it, or, when
// that was old, carried on by its course and speed with the error that grows.
func (m *Mark) carriedOn() nav.Opt[Place] {
	press, ok := m.Press.Get()
	age := press.FixAgeS.Or(0)
	if !ok || age <= oldFix || press.Source != FromPhone && press.Source != FromVessel {
		return m.Press
	}
	old := nav.Fix{Position: press.Position, SogKn: m.SogKn, CogTrue: m.CogDeg, ErrorM: press.ErrorM}
	now, ok := old.Reckon(time.Duration(age * float64(time.Second))).Get()
	if !ok {
		return m.Press
	}
	return nav.Some(Place{Position: now.Position, Source: FromDR, ErrorM: now.ErrorM, FixAgeS: press.FixAgeS})
}

// markAdjusted corrects a mark; of several the last counts, field by field.
func (f *folder) markAdjusted(e *entry, b *MarkAdjusted) {
	i, waits := f.waitsFor(b.Mark, e)
	if waits {
		return
	}
	m := &f.s.Marks[i]
	if at, ok := b.FellAt.Get(); ok {
		m.FellAt, m.BackS, m.Adjusted = at, b.BackS, nav.Some(e.said())
	}
	if pos, ok := b.Position.Get(); ok {
		m.Place = nav.Some(Place{Position: pos, Source: b.Source, ErrorM: b.ErrorM})
		m.Adjusted = nav.Some(e.said())
	}
	if b.Side != "" {
		m.Side = b.Side
	}
}

// ownGrace is how long the phone that made a mark may take it back by itself
// while somebody else is in charge. Our choice: long enough to notice the
// slip, short enough that no one has acted on it yet.
const ownGrace = 60 * time.Second

// markDismissed says that a mark was no person. It needs the one in charge,
// or the phone that made the mark, at once.
func (f *folder) markDismissed(e *entry, b *MarkDismissed) {
	i, waits := f.waitsFor(b.Mark, e)
	if waits {
		return
	}
	m := &f.s.Marks[i]
	own := e.Device == m.Device && e.At.Sub(m.At) <= ownGrace
	if !f.mayDecide(e.Device) && !own {
		f.ask(e, b.Mark, b.Reason)
		return
	}
	if !m.Dismissed.IsSet() {
		m.Dismissed, m.Reason = nav.Some(e.said()), b.Reason
	}
	f.granted(func(a Asked) bool { return a.Kind == KindMarkDismissed && a.Mark == b.Mark })
}

// workingMark chooses what everyone steers by; the one in charge decides.
func (f *folder) workingMark(e *entry, b *WorkingMark) {
	i, waits := f.waitsFor(b.Mark, e)
	if waits {
		return
	}
	if !f.mayDecide(e.Device) {
		f.ask(e, b.Mark, "")
		return
	}
	f.chosen[f.s.Marks[i].Person] = b.Mark
	f.granted(func(a Asked) bool { return a.Kind == KindWorkingMark && a.Mark == b.Mark })
}

// beacon moves the person who wears it.
func (f *folder) beacon(e *entry, b *Beacon) {
	no := PersonNo(1)
	for _, m := range f.s.Marks {
		if m.Mmsi == b.Mmsi {
			no = m.Person
		}
	}
	p := f.personOf(no, e)
	p.Beacon = nav.Some(BeaconSaid{e.said(), *b})
	f.signs = append(f.signs, sign{at: e.At, device: e.Device, beacon: no})
}
