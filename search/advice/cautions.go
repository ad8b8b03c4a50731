package advice

import (
	"time"

	"wakeback/drift/nav"
	"wakeback/search/incident"
)

// Ranges at which the near cautions come. The recovery plan opens at a tenth
// of a mile so that it is read before contact; the propeller caution at 50 m.
// Both are our choice.
const (
	planRangeM = 0.1 * nav.MetresPerNM
	nearRangeM = 50
)

// oldWeather: an observation older than this is shown as old. Our choice: a
// third of an hour is how soon a stream that turns spoils a datum by a mile
// (worked through in the scenario of a tide that turns).
const oldWeather = 20 * time.Minute

// clockSlackMs: a mark whose time is surer than this needs no caution. Our
// choice: at 6 kn a vessel goes 15 m in it.
const clockSlackMs = 5000

func (f *Frame) cautions(in Input, p incident.PersonState) {
	add := func(when bool, code string) {
		if when {
			f.Cautions = append(f.Cautions, code)
		}
	}
	out := p.Status != incident.IsAboard
	called, answered := calls(in.State)
	add(out && !called, CautionCall)
	add(out && called && !answered, CautionCallAgain)
	add(p.Status == incident.Alongside || p.Status == incident.Attached, CautionNotAboard)
	add(in.State.Status == incident.Suspended, CautionKeepLookout)
	add(others(in.State, p), CautionOthers)
	add(len(in.State.Asked) > 0, CautionAsked)
	add(len(in.State.Rivals) > 0, CautionRivals)
	if out {
		f.fixCautions(add)
		f.markCautions(in, add)
		f.driftCautions(in, add)
	}
	if r, ok := f.RangeM.Get(); ok && out {
		add(r <= planRangeM, CautionPlan)
		add(r <= nearRangeM, CautionNear)
	}
	add(out && f.Do.Way == "either", CautionSide)
}

func (f *Frame) fixCautions(add func(bool, string)) {
	fix, ok := f.Fix.Get()
	add(ok && fix.Stale, CautionFixOld)
	add(ok && fix.Source == incident.FromDR, CautionFixDR)
	add(ok && !f.VariationDeg.IsSet(), CautionVariation)
}

func (f *Frame) markCautions(in Input, add func(bool, string)) {
	seen, ok := f.Mark.Get()
	if !ok {
		return
	}
	add(seen.Source == incident.FromDR, CautionMarkDR)
	add(seen.FixAgeS.Or(0) > staleFix.Seconds(), CautionMarkOld)
	add(seen.At.After(in.Now), CautionFuture)
	if m, ok := in.State.Mark(seen.Event); ok && m.ClockErrorMs != nil {
		add(*m.ClockErrorMs > clockSlackMs, CautionClock)
	}
}

func (f *Frame) driftCautions(in Input, add func(bool, string)) {
	d, ok := f.Datum.Get()
	if !ok || d.Basis == "beacon" {
		return
	}
	add(!d.WindFromDeg.IsSet(), CautionNoWind)
	add(!d.CurrentSetDeg.IsSet(), CautionNoCurrent)
	windAt, okWind := d.WindAt.Get()
	add(okWind && in.Now.Sub(windAt) > oldWeather, CautionOldWind)
	currentAt, okCurrent := d.CurrentAt.Get()
	add(okCurrent && in.Now.Sub(currentAt) > oldWeather, CautionOldCurrent)
	add(d.beyondTrials, CautionWind)
}

// calls reports whether a call for help stands, and whether it was answered.
func calls(s incident.State) (called, answered bool) {
	for _, c := range s.Calls {
		switch {
		case c.Call.Call == "cancel" && !c.Answered:
			called, answered = false, false
		case c.Answered:
			answered = called
		case c.Call.Call == "distress" || c.Call.Call == "urgency":
			called = true
		}
	}
	return called, answered
}

func others(s incident.State, p incident.PersonState) bool {
	for _, o := range s.Persons {
		if o.No != p.No && o.Status != incident.IsAboard {
			return true
		}
	}
	return false
}
