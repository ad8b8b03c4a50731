package advice

import (
	"math"
	"time"

	"wakeback/drift/nav"
	"wakeback/search/incident"
)

// Ages at which a fix is no longer taken for the present. Our choice:
// instruments report once a second, so five missing reports are a gap; in half
// a minute at 6 kn a vessel goes 90 m, the range at which a head is lost from
// sight.
const (
	staleFix = 5 * time.Second
	lostFix  = 30 * time.Second
)

// staleHeading: a heading older than this is not steered by. Our choice: a
// boat hard over turns through 60 degrees in that time.
const staleHeading = 3 * time.Second

// courseAsHeadingKn: without a compass the course over the ground stands for
// the heading from this speed on. Our choice: below it a receiver's course is
// mostly noise and current.
const courseAsHeadingKn = 1.5

// Steer returns what to show now for the incident's state.
func Steer(in Input) Frame {
	f := Frame{
		Incident: in.State.ID, At: in.Now, Drill: in.State.Drill, Test: in.State.Test,
		Status: in.State.Status, Persons: []PersonLine{}, Cautions: []string{},
	}
	f.own(in)
	for _, p := range in.State.Persons {
		f.Persons = append(f.Persons, f.line(in, p))
	}
	p, ok := in.steeredFor()
	if !ok {
		f.Do = Do{Code: Over}
		return f
	}
	f.Person = p.No
	f.aim(in, p)
	errorM := f.errorM(in.Own)
	f.wedge(errorM)
	f.Do = f.doFor(p, errorM)
	f.leg(in, p)
	f.cautions(in, p)
	return f
}

// own fills in where the own vessel is and where it heads.
func (f *Frame) own(in Input) {
	fix, ok := in.Own.Fix.Get()
	if !ok {
		return
	}
	age := max(in.Now.Sub(fix.At), 0)
	f.Fix = nav.Some(FixSeen{
		Position: fix.Position, At: fix.At, AgeS: age.Seconds(), SogKn: fix.SogKn, CogDeg: fix.CogTrue,
		Source: in.Own.Source, ErrorM: fix.ErrorM, Stale: age > staleFix,
	})
	f.heading(in, fix)
	f.variation(fix.Position, in.Now)
}

func (f *Frame) heading(in Input, fix nav.Fix) {
	if h, ok := in.Own.Heading.Get(); ok && in.Now.Sub(in.Own.HeadingAt) <= staleHeading {
		f.HeadingDeg, f.HeadingSource = nav.Some(h), "compass"
		return
	}
	if fix.SogKn.Or(0) >= courseAsHeadingKn && fix.CogTrue.IsSet() && in.Now.Sub(fix.At) <= staleFix {
		f.HeadingDeg, f.HeadingSource = fix.CogTrue, "course"
	}
}

// present is the own fix, unless it is so old that it is lost.
func (f *Frame) present(in Input) (FixSeen, bool) {
	fix, ok := f.Fix.Get()
	if !ok || in.Now.Sub(fix.At) > lostFix {
		return FixSeen{}, false
	}
	return fix, true
}

// aim fills in mark, datum, range and bearing for the person steered for.
func (f *Frame) aim(in Input, p incident.PersonState) {
	f.ElapsedS = elapsed(in, p)
	if m, ok := workingMark(in.State, p); ok {
		f.Mark = nav.Some(seenMark(m))
	}
	where := driftedOf(in, p)
	f.Datum, f.Corridor, f.DriftNote = where.datum, where.corridor, where.note
	d, okDatum := f.Datum.Get()
	fix, okFix := f.present(in)
	if !okDatum || !okFix {
		return
	}
	line := nav.Inverse(fix.Position, d.Position)
	f.RangeM, f.BearingDeg = nav.Some(line.RangeM), line.Bearing
	bearing, ok := line.Bearing.Get()
	if !ok {
		return
	}
	if v, ok := f.VariationDeg.Get(); ok {
		f.BearingMagDeg = nav.Some(bearing.Magnetic(v))
	}
	if h, ok := f.HeadingDeg.Get(); ok {
		f.RelativeDeg = nav.Some(bearing.RelativeTo(h))
	}
	f.closing(bearing, line.RangeM, fix, d)
}

// closing is how fast the range shrinks now, and when it would be nil if that
// went on. A vessel that opens the range has no time of arrival.
func (f *Frame) closing(bearing nav.TrueDeg, rangeM float64, fix FixSeen, d Datum) {
	v, ok := (nav.Fix{SogKn: fix.SogKn, CogTrue: fix.CogDeg}).Velocity().Get()
	if !ok {
		return
	}
	if towards, ok := d.DriftTowards.Get(); ok {
		v = v.Sub(nav.Towards(towards, d.DriftKn))
	}
	unit := nav.Along(bearing, 1)
	closingMs := v.EastMs*unit.EastM + v.NorthMs*unit.NorthM
	f.ClosingKn = nav.Some(closingMs / nav.MsPerKn)
	const creepMs = 0.1 // below the noise of a receiver's speed; our choice
	if closingMs > creepMs {
		f.EtaS = nav.Some(rangeM / closingMs)
	}
}

// errorM is the radius, 95 in 100, of what is not known of the datum as seen
// from the own vessel: its own error and the datum's, which are independent.
func (f *Frame) errorM(own Own) nav.Opt[float64] {
	d, ok := f.Datum.Get()
	if !ok {
		return nav.None[float64]()
	}
	var ownM float64
	if fix, ok := own.Fix.Get(); ok {
		ownM = fix.ErrorM.Or(0)
	}
	return nav.Some(math.Hypot(d.ErrorM, ownM))
}

func (f *Frame) wedge(errorM nav.Opt[float64]) {
	r, okR := f.RangeM.Get()
	e, okE := errorM.Get()
	if !okR || !okE {
		return
	}
	if e >= r {
		f.WedgeDeg = nav.Some(180.0)
		return
	}
	f.WedgeDeg = nav.Some(math.Asin(e/r) * 180 / math.Pi)
}

// line is a person's line in the list.
func (f *Frame) line(in Input, p incident.PersonState) PersonLine {
	l := PersonLine{
		No: p.No, Name: p.Name, Status: p.Status, Condition: p.Condition,
		ElapsedS: elapsed(in, p), InSight: p.InSight,
	}
	fix, okFix := f.present(in)
	d, okDatum := driftedOf(in, p).datum.Get()
	if okFix && okDatum && p.Status != incident.IsAboard {
		line := nav.Inverse(fix.Position, d.Position)
		l.RangeM, l.Bearing = nav.Some(line.RangeM), line.Bearing
	}
	return l
}

// elapsed counts from the fall until the person is aboard; the clock does not
// stop alongside. For a person who was not seen to fall it counts from the
// earliest moment that is possible.
func elapsed(in Input, p incident.PersonState) nav.Opt[float64] {
	from, ok := fellAt(in.State, p)
	if !ok {
		return nav.None[float64]()
	}
	to := in.Now
	if p.Status == incident.IsAboard {
		to = p.StatusAt
	}
	return nav.Some(max(to.Sub(from).Seconds(), 0))
}

func fellAt(s incident.State, p incident.PersonState) (time.Time, bool) {
	if m, ok := workingMark(s, p); ok {
		return m.FellAt, true
	}
	if w, ok := p.Window.Get(); ok {
		return w.From, true
	}
	if b, ok := p.Beacon.Get(); ok {
		return b.At, true
	}
	return time.Time{}, false
}

func workingMark(s incident.State, p incident.PersonState) (incident.Mark, bool) {
	id, ok := p.WorkingMark.Get()
	if !ok {
		return incident.Mark{}, false
	}
	return s.Mark(id)
}

func seenMark(m incident.Mark) MarkSeen {
	seen := MarkSeen{
		Event: m.Event, Number: m.Number, At: m.FellAt, PressAt: m.At,
		Source: incident.FromNothing, Adjusted: m.Adjusted.IsSet(), Side: m.Side,
	}
	if place, ok := m.Place.Get(); ok {
		seen.Position, seen.Source = nav.Some(place.Position), place.Source
		seen.ErrorM, seen.FixAgeS = place.ErrorM, place.FixAgeS
	}
	return seen
}
