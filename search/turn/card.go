package turn

import (
	"fmt"
	"math"

	"wakeback/drift/nav"
)

// Names of what is done under sail, with sternway, or on the scene. They are
// cards: steps to be done in order by people, not helm orders run by a model.
const (
	QuickStop     Name = "quick_stop"
	ReachTack     Name = "reach_tack_reach"
	FigureEight   Name = "figure_eight"
	HeaveTo       Name = "heave_to"
	StopBack      Name = "stop_back"
	CalmingCircle Name = "calming_circle"
)

// StepCode names a step for a page that has its own words or pictures.
type StepCode string

// Step is one step of a card.
type Step struct {
	Code StepCode `json:"code"`
	Text string   `json:"text"`
	// Heading is the true heading of the step, from the wind.
	Heading nav.Opt[nav.TrueDeg] `json:"heading_deg"`
	// OffWindDeg is the angle between heading and wind, 0 head to wind to 180
	// dead before it.
	OffWindDeg nav.Opt[float64] `json:"off_wind_deg"`
	// Lengths is how far the step goes, in boat's lengths, least and most; M is
	// the same in metres.
	Lengths nav.Opt[[2]float64] `json:"lengths"`
	M       nav.Opt[[2]float64] `json:"m"`
}

// Card is a manoeuvre as steps.
type Card struct {
	Name     Name     `json:"name"`
	When     string   `json:"when"`
	Steps    []Step   `json:"steps"`
	Cautions []string `json:"cautions"`
	Sources  []string `json:"sources"`
}

// SailCase is what a card under sail is made for.
type SailCase struct {
	Heading  nav.TrueDeg
	WindFrom nav.Opt[nav.TrueDeg]
	LengthM  float64
	// Short takes the shorter of the two distances that sources give.
	Short bool
}

// ErrNoWind is wrapped when a card under sail is asked for without a wind.
var ErrNoWind = fmt.Errorf("%w: no wind is known, and every heading of a manoeuvre under sail counts from it", ErrManoeuvre)

// Our choice: a close reach is 60 degrees off the wind, the middle of the
// trade's range between close hauled and a beam reach; a broad reach 135.
const (
	closeReachDeg = 60
	beamReachDeg  = 90
	broadReachDeg = 135
	deepReachDeg  = beamReachDeg + 15 // 10 to 20 below a beam reach (Sail, Dec 2005, p. 35, as reprinted)
	closeHauled   = 45
)

// tack is the side that the wind comes over: Starboard or Port. Head to
// wind and dead before it counts as starboard, our choice.
func (c SailCase) tack(wind nav.TrueDeg) Side {
	if wind.Minus(c.Heading) < 0 {
		return Port
	}
	return Starboard
}

// SailCard is a manoeuvre under sail for a wind. It is refused while the wind
// is unknown.
func SailCard(n Name, c SailCase) (Card, error) {
	wind, ok := c.WindFrom.Get()
	if !ok || math.IsNaN(float64(wind)) {
		return Card{}, fmt.Errorf("%s: %w", n, ErrNoWind)
	}
	if !(c.LengthM >= 2 && c.LengthM <= 200) {
		return Card{}, fmt.Errorf("%w: length %g m, expected 2 to 200", ErrManoeuvre, c.LengthM)
	}
	b := sailing{wind: wind, tack: c.tack(wind), lengthM: c.LengthM}
	switch n {
	case QuickStop:
		return b.quickStop(), nil
	case ReachTack:
		return b.reachTack(), nil
	case FigureEight:
		return b.figureEight(c.Short), nil
	case HeaveTo:
		return b.heaveTo(), nil
	}
	return Card{}, fmt.Errorf("%w: %q under sail", ErrManoeuvre, n)
}

// sailing makes steps for a wind and the tack she is on.
type sailing struct {
	wind    nav.TrueDeg
	tack    Side
	lengthM float64
}

// on is a step on a heading off the wind, on the tack named.
func (b sailing) on(code StepCode, text string, offWindDeg float64, tack Side) Step {
	return Step{
		Code: code, Text: text, OffWindDeg: nav.Some(offWindDeg),
		Heading: nav.Some(b.wind.Add(-offWindDeg * float64(tack))),
	}
}

func (b sailing) over(s Step, least, most float64) Step {
	s.Lengths = nav.Some([2]float64{least, most})
	s.M = nav.Some([2]float64{least * b.lengthM, most * b.lengthM})
	return s
}

func plain(code StepCode, text string) Step { return Step{Code: code, Text: text} }
