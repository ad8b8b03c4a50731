package sky

import (
	"errors"
	"fmt"
	"math"
	"strconv"
	"time"

	"wakeback/drift/nav"
)

// VariationResult is the earth's main magnetic field at a place and a time.
type VariationResult struct {
	DeclinationDeg nav.VariationDeg // magnetic variation, east positive, -180 to 180; see Usable
	ErrorDeg       float64          // one standard deviation of DeclinationDeg, at most 180
	State          FieldState       // whether a compass is of use there

	InclinationDeg float64 // dip below the horizontal, -90 to 90
	HorizontalNT   float64 // intensity of the horizontal part, nT
	TotalNT        float64 // intensity, nT
	NorthNT        float64 // part towards true north, nT
	EastNT         float64 // part towards true east, nT
	DownNT         float64 // part straight down, nT
}

// Usable is the variation where a compass can be used, and absent in the
// blackout zone around a magnetic pole.
func (r VariationResult) Usable() nav.Opt[nav.VariationDeg] {
	if r.State == FieldUnusable {
		return nav.None[nav.VariationDeg]()
	}
	return nav.Some(r.DeclinationDeg)
}

// FieldState says how far a compass can be relied on.
type FieldState uint8

// The limits of the horizontal intensity are those of the blackout and caution
// zones of the WMM technical report (from memory).
const (
	FieldGood     FieldState = iota // horizontal intensity 6000 nT or more
	FieldCaution                    // below 6000 nT: the compass is sluggish
	FieldUnusable                   // below 2000 nT: the compass does not point
)

const (
	cautionBelowNT  = 6000
	blackoutBelowNT = 2000
)

// String is fit for a screen.
func (s FieldState) String() string {
	switch s {
	case FieldCaution:
		return "compass unreliable this near to the magnetic pole"
	case FieldUnusable:
		return "compass unusable this near to the magnetic pole"
	}
	return "compass usable"
}

// ErrOutsideValidity is wrapped by the error for a date that the model does
// not cover.
var ErrOutsideValidity = errors.New("magnetic variation unknown")

// OutsideValidityError says which date it was. Its text is fit for a screen.
type OutsideValidityError struct {
	Date time.Time
}

// Error names the years covered and the date asked for.
func (e *OutsideValidityError) Error() string {
	return ErrOutsideValidity.Error() + ": the model covers 2025 to 2029, the date is " + e.Date.UTC().Format(time.DateOnly)
}

// Unwrap returns [ErrOutsideValidity].
func (e *OutsideValidityError) Unwrap() error { return ErrOutsideValidity }

// The model is valid for five years from its epoch (WMM2025, December 2024).
const (
	wmmEpoch = 2025.0
	wmmEnd   = 2030.0
)

// Heights above the WGS 84 ellipsoid that the model covers, in metres: 1 km
// below to 850 km above (WMM technical report, from memory).
const (
	minAltM = -1_000
	maxAltM = 850_000
)

// Variation works out the magnetic field at p, altM metres above the WGS 84
// ellipsoid (0 will do at sea), at a time from 2025.0 up to but not including
// 2030.0. At a pole, directions are those of the longitude given.
//
// Errors: [*OutsideValidityError] for another date, one that wraps
// [nav.ErrPosition] for what is no position, and one for a height that is not
// covered.
func Variation(p nav.Position, altM float64, at time.Time) (VariationResult, error) {
	year := decimalYear(at)
	if year < wmmEpoch || year >= wmmEnd {
		return VariationResult{}, &OutsideValidityError{Date: at}
	}
	if err := p.Validate(); err != nil {
		return VariationResult{}, fmt.Errorf("magnetic variation: %w", err)
	}
	if !(altM >= minAltM && altM <= maxAltM) {
		return VariationResult{}, fmt.Errorf("magnetic variation: height %s m, expected %d to %d",
			strconv.FormatFloat(altM, 'g', 6, 64), minAltM, maxAltM)
	}
	return describe(fieldAt(p, altM/1000, year-wmmEpoch)), nil
}

// describe derives the angles, the error and the state from the vector.
func describe(f field) VariationResult {
	h := math.Hypot(f.north, f.east)
	r := VariationResult{
		DeclinationDeg: nav.VariationDeg(math.Atan2(f.east, f.north) * degPerRad),
		ErrorDeg:       declinationErrorDeg(h),
		InclinationDeg: math.Atan2(f.down, h) * degPerRad,
		HorizontalNT:   h,
		TotalNT:        math.Hypot(h, f.down),
		NorthNT:        f.north,
		EastNT:         f.east,
		DownNT:         f.down,
	}
	switch {
	case h < blackoutBelowNT:
		r.State = FieldUnusable
	case h < cautionBelowNT:
		r.State = FieldCaution
	}
	return r
}

// declinationErrorDeg is the error model of the WMM2025 technical report, one
// standard deviation over the whole earth, as quoted by a public
// implementation of the model (westphae/geomag, pull request 8):
// sqrt(0.26² + (5417/H)²) degrees, H the horizontal intensity in nT.
func declinationErrorDeg(horizontalNT float64) float64 {
	return math.Min(math.Hypot(0.26, 5417/horizontalNT), 180)
}

// decimalYear counts years the way the model does: the part of the year that
// has passed, in UTC.
func decimalYear(at time.Time) float64 {
	at = at.UTC()
	begin := time.Date(at.Year(), time.January, 1, 0, 0, 0, 0, time.UTC)
	end := time.Date(at.Year()+1, time.January, 1, 0, 0, 0, 0, time.UTC)
	return float64(at.Year()) + float64(at.Sub(begin))/float64(end.Sub(begin))
}
