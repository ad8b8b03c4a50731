package plan

import (
	"errors"
	"fmt"
	"math"
	"time"

	"wakeback/drift/nav"
	"wakeback/search/detect"
	"wakeback/search/pattern"
)

// Scene is what a search plan is made from.
type Scene struct {
	Now   time.Time
	Datum nav.Position
	// ErrorM is the radius that holds the person in 95 of 100 cases.
	ErrorM     float64
	DatumDrift nav.Velocity // over the ground
	Current    nav.Velocity // of the water over the ground
	WindFrom   nav.Opt[nav.TrueDeg]
	SpeedKn    float64 // search speed through the water
	// TurnDiameterM is the vessel's, if known: legs closer together than twice
	// that cannot be steered.
	TurnDiameterM nav.Opt[float64]
	Conditions    detect.Conditions
	// MeasuredWidthNM is the sweep width that this crew measured; it goes before any table.
	MeasuredWidthNM nav.Opt[float64]
	// FirstInto turns the first leg of a square into the wind (IAMSAR) or down
	// the drift (practice of the US Coast Guard with boats); see [Into].
	FirstInto Into
	// Passes that were made already: the next pass is turned.
	Passes int
	// Limit is the longest a plan may take; nil for no limit.
	Limit time.Duration
}

// Into is where the first leg of an expanding square leads.
type Into string

// The two practices; the sources split, so a crew chooses.
const (
	IntoWind  Into = "into_wind"  // limits the error of navigation (IAMSAR Manual vol. II as quoted in a study text)
	DownDrift Into = "down_drift" // US Coast Guard boat practice (training slides)
)

// Proposal is a pattern with its reasons.
type Proposal struct {
	Pattern   string // "sector" or "square"
	Legs      []pattern.Leg
	Water     pattern.Water
	First     nav.TrueDeg
	SpacingNM float64
	RadiusNM  float64 // of a sector search
	WidthNM   float64
	WidthBy   string
	Coverage  float64
	// PODIdeal holds for good conditions and legs that are kept, PODPoor is the
	// realistic floor; both if the person is inside, conditions as stated.
	PODIdeal float64
	PODPoor  float64
	LengthM  float64
	TakesS   float64
	Covers   bool // the pattern reaches over the whole error
	Reason   string
	Notes    []string
}

// Width is the sweep width to plan with, and who says so: the crew's own
// measurement, the table for a small boat, or, where no table has a figure,
// the spacing that is used near the coast for a person in the water.
func (s Scene) Width() (widthNM float64, by string, notes []string, err error) {
	if w, ok := s.MeasuredWidthNM.Get(); ok {
		if !(w > 0 && w < 20) {
			return 0, "", nil, fmt.Errorf("measured sweep width: expected more than 0 and less than 20 nm")
		}
		return w, "measured on board", nil, nil
	}
	table, err := detect.SmallBoat()
	if err != nil {
		return 0, "", nil, err
	}
	w, err := table.Corrected(s.Conditions)
	if errors.Is(err, detect.ErrNight) || errors.Is(err, detect.ErrVisibility) {
		return detect.CoastalSpacingNM, "spacing used near the coast", []string{err.Error()}, nil
	}
	if err != nil {
		return 0, "", nil, err
	}
	return w.NM, "table: " + w.Table, w.Notes, nil
}

// Propose makes the sector search and the expanding square for a scene, the
// better one first: a sector search while the error is no larger than its
// radius, because it passes the datum again and again; else the square, which
// grows as far as the error. An error wraps [pattern.ErrNotMadeGood] when the
// vessel cannot keep up with water and datum.
func Propose(s Scene) ([]Proposal, error) {
	width, by, notes, err := s.Width()
	if err != nil {
		return nil, err
	}
	sector, errSector := s.sector(width, by, notes)
	square, errSquare := s.square(width, by, notes)
	switch {
	case errSector != nil && errSquare != nil:
		return nil, errors.Join(errSector, errSquare)
	case errSector != nil:
		return []Proposal{square}, nil
	case errSquare != nil:
		return []Proposal{sector}, nil
	case s.ErrorM <= sector.RadiusNM*nav.MetresPerNM:
		return []Proposal{sector, square}, nil
	}
	return []Proposal{square, sector}, nil
}

// sectorRadii: a sector search of a radius of two sweep widths has a coverage
// of one at half the radius, where the legs of a 60 degree fan lie half a
// radius apart (JP 3-50 vol. I takes the spacing at mid-leg for an average).
const sectorRadii = 2

func (s Scene) sector(width float64, by string, notes []string) (Proposal, error) {
	radiusNM := sectorRadii * width
	first := s.DatumDrift.Direction().Or(s.WindFrom.Or(0).Reciprocal())
	turned := ""
	if s.Passes%2 == 1 {
		first, turned = first.Add(30), ", turned 30 degrees against the pass before"
	}
	legs, err := pattern.Sector(first, radiusNM*nav.MetresPerNM, 1, pattern.Right)
	if err != nil {
		return Proposal{}, err
	}
	p := Proposal{
		Pattern: "sector", Legs: legs, First: first, RadiusNM: radiusNM, SpacingNM: radiusNM / 2,
		WidthNM: width, WidthBy: by, Coverage: detect.Coverage(width, radiusNM/2), Notes: notes,
		Reason: "the place is well known: the legs cross the datum again and again; first leg down the drift" + turned,
	}
	return s.finish(p, radiusNM*nav.MetresPerNM)
}

// coverage is the usual first choice (from memory): spacing equal to the sweep width.
const coverage = 1

func (s Scene) square(width float64, by string, notes []string) (Proposal, error) {
	spacingM := width / coverage * nav.MetresPerNM
	if d, ok := s.TurnDiameterM.Get(); ok && spacingM < 2*d {
		spacingM = 2 * d
		notes = append(notes[:len(notes):len(notes)], "spacing set by the turning circle of the vessel, not by what is seen")
	}
	first, why := s.firstOfSquare()
	if s.Passes%2 == 1 {
		first, why = first.Add(45), why+", turned 45 degrees against the search before"
	}
	legs, err := pattern.Square(first, spacingM, s.squareLegs(spacingM), pattern.Right)
	if err != nil {
		return Proposal{}, err
	}
	p := Proposal{
		Pattern: "square", Legs: legs, First: first, SpacingNM: spacingM / nav.MetresPerNM,
		WidthNM: width, WidthBy: by, Coverage: detect.Coverage(width, spacingM/nav.MetresPerNM), Notes: notes,
		Reason: "the place is known within close limits: legs grow outward from the datum; first leg " + why,
	}
	return s.finish(p, float64(len(legs)/4)*spacingM)
}

// squareLegs is how many legs reach over the error: a block of half side k·d
// takes 4k+1 legs. At least one block, at most as much as the limit allows.
func (s Scene) squareLegs(spacingM float64) int {
	k := max(1, math.Ceil(s.ErrorM/spacingM))
	if s.Limit > 0 && s.SpeedKn > 0 {
		run := s.SpeedKn * nav.MsPerKn * s.Limit.Seconds()
		// 4k+1 legs are (2k+1)² spacings long.
		k = min(k, max(1, math.Floor((math.Sqrt(run/spacingM)-1)/2)))
	}
	return int(min(k, 30))*4 + 1
}

func (s Scene) firstOfSquare() (nav.TrueDeg, string) {
	wind, okWind := s.WindFrom.Get()
	drift, okDrift := s.DatumDrift.Direction().Get()
	switch {
	case s.FirstInto == DownDrift && okDrift:
		return drift, "down the drift"
	case okWind:
		return wind, "into the wind"
	case okDrift:
		return drift, "down the drift"
	}
	return 0, "north: neither wind nor drift is known"
}

// finish fills in length, time and chances, and checks that every leg can be
// steered.
func (s Scene) finish(p Proposal, reachM float64) (Proposal, error) {
	p.Water = pattern.Water{SpeedKn: s.SpeedKn, Current: s.Current, DatumDrift: s.DatumDrift}
	runs, err := pattern.Ride(p.Legs, s.Datum, s.Now, p.Water)
	if err != nil {
		return Proposal{}, fmt.Errorf("%s: %w", p.Pattern, err)
	}
	for _, r := range runs {
		p.TakesS += r.RunS
	}
	p.LengthM = pattern.LengthM(p.Legs)
	p.PODIdeal, p.PODPoor = detect.PODParallel(p.Coverage), detect.PODRandom(p.Coverage)
	p.Covers = reachM >= s.ErrorM
	if !p.Covers {
		p.Notes = append(p.Notes[:len(p.Notes):len(p.Notes)], "the pattern does not reach over the whole error: more has to be searched after it")
	}
	return p, nil
}
