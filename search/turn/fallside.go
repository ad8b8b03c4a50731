package turn

import "wakeback/drift/nav"

// AtOnce is the first order after a fall, while it still matters where the
// stern goes.
type AtOnce struct {
	Code       Code        `json:"code"` // either_way, wheel_stern_clear or astern_slow_turn
	Side       Side        `json:"side"` // of the wheel; 0 for none
	Heading    nav.TrueDeg `json:"heading_deg"`
	Reciprocal nav.TrueDeg `json:"reciprocal_deg"`
}

// sternSpeedKn bounds the advice from above: from planing speed on, the person
// is astern before it matters (national sea-angling guidance of a yachting
// association, as summarised: at low speed turn to the side of the fall, at
// higher speed the person is far astern before it matters). The figure is our
// choice, between the 5 and the 18 knots of the two cases that are told apart.
const sternSpeedKn = 10

// FirstOrder says which way the wheel goes at once. While the side of the fall
// is unknown it says either way: no way to turn is suggested.
func FirstOrder(side Side, speedKn float64, heading nav.TrueDeg) AtOnce {
	a := AtOnce{Code: EitherWay, Heading: heading, Reciprocal: heading.Reciprocal()}
	if side != Port && side != Starboard {
		return a
	}
	if speedKn < sternSpeedKn {
		a.Code, a.Side = SternClear, side
		return a
	}
	a.Code, a.Side = SlowTurn, side
	return a
}

// Words is the order as a voice says it.
func (a AtOnce) Words() string {
	switch a.Code {
	case SternClear:
		return "wheel to " + a.Side.String() + ", stern clears"
	case SlowTurn:
		return "person is astern: slow, then turn"
	}
	return "either way. Heading " + nav.SpokenFigures(a.Heading.Figures()) + ", reciprocal " + nav.SpokenFigures(a.Reciprocal.Figures())
}
