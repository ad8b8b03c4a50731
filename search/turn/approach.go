package turn

import (
	"errors"
	"fmt"
	"math"

	"wakeback/drift/nav"
)

// PickUp is the side of the person, by the wind, on which the vessel ends.
type PickUp string

// The two sides. The trade's sources split between them, so both are shown
// with their reasons and the skipper's standing choice decides.
const (
	ToWindward PickUp = "to_windward" // the vessel stops upwind of the person
	ToLeeward  PickUp = "to_leeward"  // the vessel stops downwind of the person
)

// Reasoned is a sentence with where it is from.
type Reasoned struct {
	Text   string `json:"text"`
	Source string `json:"source"`
}

// Candidate is one way to come up to the person.
type Candidate struct {
	PickUp PickUp `json:"pick_up"`
	// Course is the heading of the last lengths, and Side the vessel's side on
	// which the person then is. From is where the last run begins, counted from
	// the person and carried along with them.
	Course nav.TrueDeg `json:"course_deg"`
	Side   Side        `json:"side"`
	From   nav.Offset  `json:"from"`
	For    []Reasoned  `json:"for"`
	With   []Reasoned  `json:"with_care"`
}

// ApproachCase is what a final approach is laid for.
type ApproachCase struct {
	WindFrom  nav.Opt[nav.TrueDeg]
	Bearing   nav.TrueDeg // of the person
	RangeM    float64
	SpeedKn   float64
	StoppingM nav.Opt[float64] // from the speed she has; see [Profile.StoppingFromM]
	RadiusM   float64
	LengthM   float64
	UnderSail bool
	Choice    PickUp // the skipper's standing choice; empty when none was made
	Missed    int    // passes missed so far
}

// Approach is the final approach.
type Approach struct {
	// Candidates are both sides, the one chosen first; one alone, straight at
	// the person, when the wind is unknown.
	Candidates []Candidate `json:"candidates"`
	Chosen     bool        `json:"chosen"` // by the skipper's standing choice or after a missed pass, and not by our order
	Reason     string      `json:"reason"`
	WayOffM    float64     `json:"way_off_m"` // take way off at this range
	NeutralM   float64     `json:"neutral_m"` // engine out of gear at this range
	CardOpen   bool        `json:"card_open"` // the recovery card is due
	Now        Code        `json:"now"`       // way_off, engine_neutral or steady
}

// cardRangeM is where the recovery card opens: a tenth of a nautical mile, in
// time to rig what it asks for; our choice.
const cardRangeM = nav.MetresPerNM / 10

// Our choices: without a stopping distance six lengths are taken, more than a
// small vessel needs from search speed; the engine is out of gear from a
// length and a half, before the person can come abaft the bow (common
// practice: in neutral before the person is abaft the bow quarter).
const (
	stopLengths    = 6
	neutralLengths = 1.5
	minRunLengths  = 8 // straight run of the last approach
)

// ErrApproach is wrapped when no approach can be laid.
var ErrApproach = errors.New("no final approach")

// PlanApproach lays the final approach.
func PlanApproach(c ApproachCase) (Approach, error) {
	if !(c.RangeM >= 0 && c.RangeM < 1e6) || !(c.LengthM >= 2 && c.LengthM <= 400) || !(c.SpeedKn >= 0 && c.SpeedKn <= 100) || !(c.RadiusM >= 0 && c.RadiusM <= 5000) {
		return Approach{}, fmt.Errorf("%w: range %g m, length %g m, speed %g kn, radius %g m: expected 0 to 1e6, 2 to 400, 0 to 100, 0 to 5000",
			ErrApproach, c.RangeM, c.LengthM, c.SpeedKn, c.RadiusM)
	}
	if c.Choice != "" && c.Choice != ToWindward && c.Choice != ToLeeward {
		return Approach{}, fmt.Errorf("%w: standing choice %q, expected %s or %s", ErrApproach, c.Choice, ToWindward, ToLeeward)
	}
	a := Approach{
		WayOffM: c.StoppingM.Or(stopLengths * c.LengthM), NeutralM: neutralLengths * c.LengthM,
		CardOpen: c.RangeM <= cardRangeM,
	}
	a.Now = a.cue(c.RangeM)
	wind, ok := c.WindFrom.Get()
	if !ok {
		a.Reason = "wind unknown: straight at the person; see by them and the sea where the wind is"
		a.Candidates = []Candidate{{Course: c.Bearing}}
		return a, nil
	}
	a.Candidates = []Candidate{c.windward(wind), c.leeward(wind)}
	a.choose(c)
	return a, nil
}

// cue is what is due at a range.
func (a Approach) cue(rangeM float64) Code {
	switch {
	case rangeM <= a.NeutralM:
		return Neutral
	case rangeM <= a.WayOffM:
		return WayOff
	}
	return Steady
}

// choose puts the side to be taken first: the skipper's; else our choice,
// to windward of the person. After each missed pass it is the
// other side's turn.
func (a *Approach) choose(c ApproachCase) {
	first := c.Choice
	a.Chosen = first != ""
	a.Reason = "the skipper's standing choice"
	if first == "" {
		first = ToWindward
		a.Reason = "no standing choice: the vessel to windward makes a lee, and more of the sources read put the person to leeward of the vessel; the skipper may decide otherwise"
	}
	if c.Missed%2 == 1 {
		first = first.other()
		a.Chosen = true
		a.Reason = fmt.Sprintf("missed pass %d: the other side is next", c.Missed)
	}
	if a.Candidates[0].PickUp != first {
		a.Candidates[0], a.Candidates[1] = a.Candidates[1], a.Candidates[0]
	}
}

func (p PickUp) other() PickUp {
	if p == ToWindward {
		return ToLeeward
	}
	return ToWindward
}

// nearWindDeg is how near the wind the last run is: under power 20 degrees off
// it, so that the bow does not fall off to either side at random; under sail a
// close reach. Our choice within common practice.
const nearWindDeg = 20

// run makes a candidate: on a heading near the wind, from the side of it that
// the vessel lies on, with the person on the side that the wind bears them to.
func (c ApproachCase) run(wind nav.TrueDeg, p PickUp) Candidate {
	off := float64(nearWindDeg)
	if c.UnderSail {
		off = closeReachDeg
	}
	right := Side(1)
	if c.Bearing.Minus(wind) < 0 {
		right = -1
	}
	course := wind.Add(off * float64(right))
	// With the heading to the right of the wind, the wind is over the port bow
	// and the starboard side is the lee side.
	side := right
	if p == ToLeeward {
		side = -side
	}
	long := math.Max(minRunLengths*c.LengthM, c.StoppingM.Or(stopLengths*c.LengthM)+2*c.LengthM)
	beside := nav.Along(course.Add(-90*float64(side)), c.LengthM/2)
	return Candidate{PickUp: p, Course: course, Side: side, From: nav.Along(course.Reciprocal(), long).Add(beside)}
}

func (c ApproachCase) windward(wind nav.TrueDeg) Candidate {
	k := c.run(wind, ToWindward)
	k.For = []Reasoned{
		{"stopped upwind, with the person alongside well forward of the propellers", "Transport Canada TP10038"},
		{"the vessel between wind and person: the wind sets her to them", "US Navy training module NSST MAN-OVBD, 2011"},
		{"under sail: picked up over the leeward side", "Sail, Dec 2005, p. 35, as reprinted"},
	}
	k.With = []Reasoned{
		{"a light or high-sided boat is blown onto the person: stay off and use a line", "common practice"},
		{"engine out of gear before the person comes abaft the bow", "common practice"},
	}
	return k
}

func (c ApproachCase) leeward(wind nav.TrueDeg) Candidate {
	k := c.run(wind, ToLeeward)
	k.For = []Reasoned{
		{"into wind and swell, so that the person drifts to the boat and not under it", "MAST Tasmania, person overboard"},
		{"the boat is not blown onto the person", "common practice"},
	}
	k.With = []Reasoned{
		{"no lee: the person is in the sea that breaks on the weather side", "common practice"},
		{"a vessel of more windage drifts away from the person: a line has to be passed at once", "common practice"},
	}
	return k
}
