package advice

import (
	"fmt"
	"strings"

	"wakeback/drift/nav"
	"wakeback/search/incident"
)

// Code names the one thing to do.
type Code string

// The codes. A page has a sentence for each, in each language.
const (
	SteerTo      Code = "steer_to"       // towards where to look now
	ComeAbout    Code = "come_about"     // the person is astern: turn back to the bearing
	SteerLeg     Code = "steer_leg"      // along a search leg
	LookAllRound Code = "look_all_round" // the error is as large as the range
	NoFix        Code = "no_fix"         // the own position is not known
	NoPosition   Code = "no_position"    // the place of the fall is not known
	Window       Code = "window"         // not seen to fall: go back along the track
	Recover      Code = "recover"        // alongside is not aboard
	AllAboard    Code = "all_aboard"     // everyone is back on board
	Over         Code = "over"           // stood down
)

// Do is the one thing to do now.
type Do struct {
	Code       Code                 `json:"code"`
	BearingDeg nav.Opt[nav.TrueDeg] `json:"bearing_deg,omitzero"`
	RangeM     nav.Opt[float64]     `json:"range_m,omitzero"`
	// Relative is where to look from the bow, if the heading is known.
	Relative nav.Opt[nav.RelativeDeg] `json:"relative_deg,omitzero"`
	// Way is the way to turn: "port", "starboard" or "either". It is "either"
	// for a large turn while the side of the fall is not known.
	Way string `json:"way,omitempty"`
	// Back is the reciprocal of the course at the fall.
	Back nav.Opt[nav.TrueDeg] `json:"back_deg,omitzero"`
}

// The cautions of a frame. A page has a sentence for each.
const (
	CautionCall        = "call_first"         // no distress call is logged: this does not call for help
	CautionCallAgain   = "call_again"         // a call is logged, and no answer
	CautionFixOld      = "fix_old"            // the own position is stale
	CautionFixDR       = "fix_dr"             // the own position is reckoned, not measured
	CautionMarkDR      = "mark_dr"            // the mark was made on a reckoned position
	CautionMarkOld     = "mark_old_fix"       // the mark was made on an old fix
	CautionNoWind      = "no_wind"            // drift without wind
	CautionNoCurrent   = "no_current"         // drift without current
	CautionOldWind     = "old_wind"           // the wind was observed long ago
	CautionOldCurrent  = "old_current"        // the current was observed long ago
	CautionWind        = "wind_beyond_trials" // stronger than the leeway was measured in
	CautionVariation   = "no_variation"       // no magnetic directions
	CautionNear        = "engine_neutral"     // close to the person: propeller
	CautionPlan        = "recovery_plan"      // open the recovery plan before contact
	CautionSide        = "side_unknown"       // no side of the fall: no way to turn is advised
	CautionNotAboard   = "alongside_not_aboard"
	CautionOthers      = "others_in_water" // someone else still has to be found
	CautionAsked       = "wish_waiting"    // a wish waits for the one in charge
	CautionRivals      = "two_in_charge"
	CautionClock       = "clock_unsure" // the mark's time may be off by seconds
	CautionFuture      = "mark_in_future"
	CautionKeepLookout = "keep_lookout" // suspended by the authority is not the end of looking out
)

// turnLimitDeg: beyond this angle from the bow a person counts as astern and
// the sentence is to come about. Our choice: about what lies abaft the beam.
const turnLimitDeg = 120

// steerTo makes the order towards a bearing.
func steerTo(bearing nav.TrueDeg, rangeM float64, heading nav.Opt[nav.TrueDeg], mark nav.Opt[MarkSeen]) Do {
	d := Do{Code: SteerTo, BearingDeg: nav.Some(bearing), RangeM: nav.Some(rangeM)}
	h, ok := heading.Get()
	if !ok {
		return d
	}
	rel := bearing.RelativeTo(h)
	d.Relative = nav.Some(rel)
	d.Way = way(rel)
	if rel > turnLimitDeg || rel < -turnLimitDeg {
		d.Code = ComeAbout
		if m, ok := mark.Get(); !ok || m.Side == "" {
			d.Way = "either"
		}
	}
	return d
}

func way(rel nav.RelativeDeg) string {
	if rel < 0 {
		return "port"
	}
	return "starboard"
}

// English is the sentence for a terminal and for the log.
func (d Do) English() string {
	switch d.Code {
	case SteerTo, ComeAbout:
		return d.steerEnglish()
	case SteerLeg:
		bearing, _ := d.BearingDeg.Get()
		return "Search leg: steer " + bearing.String() + "."
	case LookAllRound:
		return "Look all round: the person is as near as the error is large."
	case NoFix:
		return "Own position unknown: keep pointing at the person."
	case NoPosition:
		return "The place of the fall is unknown: turn back along the track."
	case Window:
		return "Not seen to fall: turn back along the track and call for help now."
	case Recover:
		return "Alongside is not aboard: get the person on board."
	case AllAboard:
		return "Everyone is aboard. Cancel the distress call by voice."
	case Over:
		return "Stood down."
	}
	return string(d.Code)
}

func (d Do) steerEnglish() string {
	var b strings.Builder
	bearing, _ := d.BearingDeg.Get()
	if d.Code == ComeAbout {
		b.WriteString("Turn back")
		if d.Way == "either" {
			b.WriteString(" either way")
		} else {
			b.WriteString(" to " + d.Way)
		}
		fmt.Fprintf(&b, ", steer %s", bearing)
	} else {
		fmt.Fprintf(&b, "Steer %s", bearing)
	}
	if rel, ok := d.Relative.Get(); ok {
		b.WriteString(": " + nav.WordsRelative(rel))
	}
	if r, ok := d.RangeM.Get(); ok {
		b.WriteString(", " + nav.WordsRange(r))
	}
	b.WriteString(".")
	return b.String()
}

// doFor decides the one thing to do for a person.
func (f *Frame) doFor(p incident.PersonState, errorM nav.Opt[float64]) Do {
	switch {
	case f.Status == incident.StoodDownSt:
		return Do{Code: Over}
	case p.Status == incident.IsAboard:
		return Do{Code: AllAboard}
	case p.Status == incident.Alongside || p.Status == incident.Attached:
		return Do{Code: Recover}
	}
	back := f.back()
	rangeM, okRange := f.RangeM.Get()
	bearing, okBearing := f.BearingDeg.Get()
	switch {
	case !f.Datum.IsSet() && p.Window.IsSet():
		return Do{Code: Window, Back: back}
	case !f.Datum.IsSet():
		return Do{Code: NoPosition, Back: back}
	case !okRange:
		return Do{Code: NoFix, Back: back}
	case rangeM <= errorM.Or(0) || !okBearing:
		return Do{Code: LookAllRound, RangeM: nav.Some(rangeM)}
	}
	d := steerTo(bearing, rangeM, f.HeadingDeg, f.Mark)
	d.Back = back
	return d
}

// back is the reciprocal of the present course, for a turn back by compass.
func (f *Frame) back() nav.Opt[nav.TrueDeg] {
	h, ok := f.HeadingDeg.Get()
	if !ok {
		return nav.None[nav.TrueDeg]()
	}
	return nav.Some(h.Reciprocal())
}
