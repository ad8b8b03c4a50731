package turn

import (
	"wakeback/drift/nav"
)

// Code names an order or a situation for a page or a voice to put into words.
type Code string

// The codes of orders, in the order in which a return meets them.
const (
	HelmOver    Code = "helm_over"         // hard over to the side of Helm
	HelmShift   Code = "helm_shift"        // from hard over to hard over the other way
	Midships    Code = "midships"          // and meet her
	IdleTurn    Code = "idle_turn"         // engine to neutral, helm to the side of the fall, then slowly round
	Steady      Code = "steady"            // hold the heading of Steer
	ComeTo      Code = "come_to"           // turn to the side of Turn until the heading of Steer
	OpenRange   Code = "open_range"        // hold the heading: the person is inside the turning circle
	TurnAtThem  Code = "turn_at_them"      // the range is open enough: turn back at them
	Alongside   Code = "alongside"         // at the person
	StoppedNear Code = "stopped_near"      // lying near the person without steerage way
	NoWay       Code = "no_way"            // too slow to steer: way on first
	ByBearing   Code = "by_bearing"        // heading unknown: only the bearing can be given
	WayOff      Code = "way_off"           // take way off
	Neutral     Code = "engine_neutral"    // out of gear: the person is near the propeller
	EitherWay   Code = "either_way"        // the side of the fall is unknown
	SternClear  Code = "wheel_stern_clear" // wheel to the side of the fall: the stern swings clear
	SlowTurn    Code = "astern_slow_turn"  // the person is astern already: slow, then turn
)

// hardOver is the words for a helm hard over to a side.
func hardOver(h Helm) string {
	if h < 0 {
		return "hard a-port"
	}
	return "hard a-starboard"
}

// Words is the order in the words of the trade, as a voice says them.
func (a Advice) Words() string {
	steer := ""
	if s, ok := a.Steer.Get(); ok {
		steer = nav.SpokenFigures(s.Figures())
	}
	switch a.Code {
	case HelmOver:
		return hardOver(a.Helm.Or(0))
	case HelmShift:
		return "shift the helm, " + hardOver(a.Helm.Or(0))
	case Midships:
		return "midships, meet her on " + steer
	case IdleTurn:
		return "engine to neutral, helm to " + a.Turn.String() + ", then round slowly"
	case Steady:
		return "steady on " + steer
	case ComeTo, TurnAtThem:
		return "come to " + a.Turn.String() + ", steer " + steer
	case OpenRange:
		return "hold " + steer + " and open the range"
	case Alongside:
		return "alongside: engine out of gear"
	case StoppedNear:
		return "stopped near: the person bears " + nav.SpokenFigures(a.Bearing.Or(0).Figures()) + ". Pass a line, or way on gently"
	case NoWay:
		return "no way on: get way on, then turn"
	case ByBearing:
		return "heading unknown: the person bears " + nav.SpokenFigures(a.Bearing.Or(0).Figures())
	}
	return ""
}
