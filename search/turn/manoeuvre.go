package turn

import (
	"fmt"
	"math"

	"wakeback/drift/nav"
)

// Name names a manoeuvre.
type Name string

// The manoeuvres under power.
const (
	Single     Name = "single"
	Williamson Name = "williamson"
	Scharnow   Name = "scharnow"
	RaceTrack  Name = "race-track"
	SlowCircle Name = "slow-circle"
)

// Side is a side of the vessel.
type Side int

// The sides; Unknown is no side.
const (
	Unknown   Side = 0
	Starboard Side = 1
	Port      Side = -1
)

func (s Side) String() string {
	switch s {
	case Starboard:
		return "starboard"
	case Port:
		return "port"
	}
	return "either way"
}

// phase is one helm order and the heading change from the original course, to
// the side of the first turn, at which it ends.
type phase struct {
	helm     float64 // to the side of the first turn
	until    float64 // change of heading that ends it
	rising   bool    // reached from below
	word     string
	code     Code
	hold     bool // hold the heading of until, till the person is abaftDeg from the bow
	abaftDeg float64
	facing   bool // also ends when the person is ahead
	slow     bool // with the engine idling
}

// to is the helm with the first turn to a side; no minus zero.
func (ph phase) to(side Side) Helm { return Helm(ph.helm*float64(side) + 0) }

// Textbook angles: IAMSAR Manual vol. III as reprinted (single turn 250,
// Williamson 60, Scharnow 240, midships 20 short of the reciprocal). Transport
// Canada TP10038 says of the 60 that it suits many vessels and the exact figure
// must come from trial.
const (
	singleUntil     = 250
	williamsonShift = 60
	scharnowShift   = 240
	midshipsShort   = 20
	raceTrackTurn   = 180
)

// sequence is the helm orders of a manoeuvre, with the angle at which the helm
// is shifted where the manoeuvre has one.
func sequence(n Name, shiftDeg float64) ([]phase, error) {
	switch n {
	case Single:
		return []phase{{helm: 1, until: singleUntil, rising: true, code: HelmOver, word: "hard over to the side of the fall"}}, nil
	case Williamson:
		return []phase{
			{helm: 1, until: shiftDeg, rising: true, code: HelmOver, word: "hard over to the side of the fall"},
			{helm: -1, until: -(180 - midshipsShort), code: HelmShift, word: "shift the helm hard over to the other side"},
			{helm: 0, until: -180, code: Midships, word: "midships, meet her"},
		}, nil
	case Scharnow:
		return []phase{
			{helm: 1, until: shiftDeg, rising: true, code: HelmOver, word: "hard over"},
			{helm: -1, until: 180 + midshipsShort, code: HelmShift, word: "shift the helm hard over to the other side"},
			{helm: 0, until: 180, code: Midships, word: "midships, meet her"},
		}, nil
	}
	return nil, fmt.Errorf("%w: %q", ErrManoeuvre, n)
}

// ShiftDeg is the textbook angle of a manoeuvre that has one.
func ShiftDeg(n Name) float64 {
	switch n {
	case Williamson:
		return williamsonShift
	case Scharnow:
		return scharnowShift
	}
	return 0
}

// Order is one helm order as it falls due.
type Order struct {
	AtS     float64
	Word    string
	Code    Code
	Helm    Helm
	Until   nav.TrueDeg // the heading at which the next is due
	UntilOf float64     // change of heading from the original course, to the first side
}

// Point is a point of the path, in the frame of the water, from the place
// where the first order was given.
type Point struct {
	TS         float64
	Offset     nav.Offset
	HeadingDeg nav.TrueDeg
	SpeedMs    float64
}

// maxTurnS bounds a manoeuvre: no vessel takes an hour to come about.
const maxTurnS = 3600

// A vessel with a quick helm stops swinging short of the last heading once the
// helm is midships. From the moment she swings slower than a tenth of her rate
// hard over she is eased on with a third of the helm, as a helmsman would; our
// choice.
const (
	swingPart = 0.1
	easeHelm  = 1.0 / 3
)

// stops reports whether a vessel with her helm midships has stopped swinging.
func (ph phase) stops(order Helm, s State, m Model) bool {
	hardDegS := m.SpeedMs / m.RadiusM * 180 / math.Pi
	return ph.helm == 0 && order == 0 && math.Abs(s.RateDegS) < swingPart*hardDegS
}

// meet is the helm that is really laid.
func (ph phase) meet(order Helm, eased bool, side Side) Helm {
	switch {
	case !eased:
		return order
	case ph.rising:
		return Helm(easeHelm * float64(side))
	}
	return Helm(-easeHelm * float64(side))
}

// change is how far the heading is from the original course, positive to the
// side of the first turn.
func change(s State, course nav.TrueDeg, side Side) float64 {
	return (s.HeadingDeg - float64(course)) * float64(side)
}

func reached(s State, course nav.TrueDeg, side Side, ph phase) bool {
	c := change(s, course, side)
	if ph.rising {
		return c >= ph.until
	}
	return c <= ph.until
}
