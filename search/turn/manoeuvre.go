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
	StopBack   Name = "stop"
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
	helm   float64 // to the side of the first turn
	until  float64 // change of heading that ends it
	rising bool    // reached from below
	word   string
}

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
		return []phase{{1, singleUntil, true, "hard over to the side of the fall"}}, nil
	case Williamson:
		return []phase{
			{1, shiftDeg, true, "hard over to the side of the fall"},
			{-1, -(180 - midshipsShort), false, "shift the helm hard over to the other side"},
			{0, -180, false, "midships, meet her"},
		}, nil
	case Scharnow:
		return []phase{
			{1, shiftDeg, true, "hard over"},
			{-1, 180 + midshipsShort, false, "shift the helm hard over to the other side"},
			{0, 180, false, "midships, meet her"},
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

// turned is a run of a sequence in the water's frame.
type turned struct {
	orders []Order
	path   []Point
	end    State
	endS   float64
	peak   float64
}

// maxTurnS bounds a manoeuvre: no vessel takes an hour to come about.
const maxTurnS = 3600

// run steers the sequence through the model from a steady course.
func (m Model) run(course nav.TrueDeg, side Side, seq []phase) (turned, error) {
	s := m.start(course)
	t, out := 0.0, turned{}
	record := func() {
		out.path = append(out.path, Point{t, nav.Offset{EastM: s.EastM, NorthM: s.NorthM}, nav.True(s.HeadingDeg), s.SpeedMs})
	}
	record()
	sinceRecord := 0.0
	for _, ph := range seq {
		helm := Helm(ph.helm * float64(side))
		out.orders = append(out.orders, Order{
			AtS: t, Word: ph.word, Helm: helm, UntilOf: ph.until,
			Until: course.Add(ph.until * float64(side)),
		})
		held, eased := 0.0, false
		order := currentHelm(out.orders)
		for !reached(s, course, side, ph) {
			if held >= m.OrderDelayS {
				order = helm
			}
			eased = eased || ph.stops(order, s, m)
			s = m.step(s, ph.meet(order, eased, side), stepS)
			t, held, sinceRecord = t+stepS, held+stepS, sinceRecord+stepS
			out.peak = math.Max(out.peak, change(s, course, side))
			if sinceRecord >= 1 {
				record()
				sinceRecord = 0
			}
			if t > maxTurnS {
				return turned{}, fmt.Errorf("%w: the vessel does not come round within an hour", ErrManoeuvre)
			}
		}
	}
	record()
	out.end, out.endS = s, t
	return out, nil
}

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

// currentHelm is the helm that still lies while a new order is on its way.
func currentHelm(orders []Order) Helm {
	if len(orders) < 2 {
		return 0
	}
	return orders[len(orders)-2].Helm
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
