package pattern

import (
	"errors"
	"fmt"
	"math"

	"wakeback/drift/nav"
)

// LegKind says what a leg is for.
type LegKind string

// The kinds of leg.
const (
	SearchLeg LegKind = "search"
	CrossLeg  LegKind = "cross" // from one search leg to the next
)

// Leg is a straight run in the datum frame.
type Leg struct {
	Kind    LegKind
	Course  nav.TrueDeg
	LengthM float64
	From    nav.Offset // from the datum
	To      nav.Offset
}

// Turns is the side to which a pattern turns.
type Turns int

// The sides.
const (
	Right Turns = 1
	Left  Turns = -1
)

// ErrPattern is wrapped by every refusal of a pattern.
var ErrPattern = errors.New("no such pattern")

// maxExtentM bounds how far a pattern reaches from its datum: 60 nm. The flat
// map it is laid on is off by less than 0.05 m in each kilometre there, half
// of the 0.1 in 1000 allowed to a leg; a person in the water is not searched
// for by one small vessel over more.
const maxExtentM = 60 * nav.MetresPerNM

// maxLegs bounds the number of legs of one pattern; our choice.
const maxLegs = 500

func refuse(format string, args ...any) error {
	return fmt.Errorf("%w: "+format, append([]any{ErrPattern}, args...)...)
}

func positive(name string, v float64) error {
	if math.IsNaN(v) || math.IsInf(v, 0) || v <= 0 {
		return refuse("%s must be more than nothing", name)
	}
	return nil
}

func count(name string, n int) error {
	if n < 1 || n > maxLegs {
		return refuse("%s must be 1 to %d", name, maxLegs)
	}
	return nil
}

// walk chains legs of the given courses and lengths from a start.
type walk struct {
	at   nav.Offset
	legs []Leg
}

func (w *walk) run(kind LegKind, course nav.TrueDeg, lengthM float64) {
	to := w.at.Add(nav.Along(course, lengthM))
	w.legs = append(w.legs, Leg{Kind: kind, Course: course, LengthM: lengthM, From: w.at, To: to})
	w.at = to
}

// done checks the extent of the finished walk.
func (w *walk) done() ([]Leg, error) {
	for _, l := range w.legs {
		if r := l.To.RangeM(); !(r <= maxExtentM) {
			return nil, refuse("it reaches %.0f nm from its datum, and %.0f nm is the limit", r/nav.MetresPerNM, maxExtentM/nav.MetresPerNM)
		}
	}
	return w.legs, nil
}

// LengthM is the length of all legs together.
func LengthM(legs []Leg) float64 {
	var sum float64
	for _, l := range legs {
		sum += l.LengthM
	}
	return sum
}
