package turn

import (
	"fmt"
	"math"
	"slices"
	"time"

	"wakeback/drift/nav"
)

// Case is the situation in which a vessel turns back.
type Case struct {
	Model   Model
	Heading nav.TrueDeg // before the first order
	Side    Side        // of the fall; Unknown when nobody saw it
	Delay   time.Duration
	// PersonDrift is what the person does against the water: leeway only, since
	// one current carries both. Nil when unknown.
	PersonDrift nav.Velocity
	// TurnTo is the side of the first turn when it shall not be that of the fall.
	TurnTo Side
	// ShiftDeg replaces the textbook angle of a manoeuvre that has one.
	ShiftDeg nav.Opt[float64]
}

// Result is a manoeuvre run for a case. All of it is in the frame of the
// water, with the place of the fall as origin: a current carries vessel and
// person alike and is left out.
type Result struct {
	Name   Name
	Side   Side // of the first turn
	Orders []Order
	Path   []Point
	// TurnedS is when the last order is done; TotalS when the vessel is back at
	// the person, after running back to them.
	TurnedS float64
	TotalS  float64
	// ClosestM is the closest approach on the way back, on the run steered by
	// the orders and then towards the person.
	ClosestM float64
	// OwnShiftDeg is the angle that would bring this vessel onto its own track,
	// and the offsets that it and the textbook angle leave.
	OwnShiftDeg     nav.Opt[float64]
	OwnOffsetM      nav.Opt[float64]
	TextbookOffsetM nav.Opt[float64]
	Cautions        []string
}

// turnTo is the side of the first turn: that asked for, else that of the fall.
func (c Case) turnTo() Side {
	if c.TurnTo != Unknown {
		return c.TurnTo
	}
	return c.Side
}

// Plan runs a manoeuvre for a case. It refuses to run one towards no side:
// while the side of the fall is unknown the caller runs both (see [Both]) and
// shows them alike.
func Plan(n Name, c Case) (Result, error) {
	if err := c.Model.Validate(); err != nil {
		return Result{}, err
	}
	side := c.turnTo()
	if side == Unknown {
		return Result{}, fmt.Errorf("%w: the side of the fall is unknown, so no way to turn is advised; run it to both sides", ErrManoeuvre)
	}
	if c.Delay < 0 || c.Delay > 24*time.Hour {
		return Result{}, fmt.Errorf("%w: delay %s, expected 0 to 24 h", ErrManoeuvre, c.Delay)
	}
	if err := c.applies(n); err != nil {
		return Result{}, err
	}
	seq, err := c.sequence(n)
	if err != nil {
		return Result{}, err
	}
	r := newRunner(c, side)
	for _, ph := range seq {
		if err := r.phase(ph); err != nil {
			return Result{}, err
		}
	}
	turnedS := r.t
	r.runBack()
	res := Result{
		Name: n, Side: side, Orders: r.orders, Path: r.path,
		TurnedS: turnedS, TotalS: r.t, ClosestM: r.closestM, Cautions: cautionsFor(n),
	}
	if shift := ShiftDeg(n); shift != 0 {
		if err := res.angles(c.Model, n, shift); err != nil {
			return Result{}, err
		}
	}
	return res, nil
}

func (res *Result) angles(m Model, n Name, textbook float64) error {
	own, ownOffset, err := m.OwnShiftDeg(n)
	if err != nil {
		return err
	}
	book, err := m.Trial(n, textbook)
	if err != nil {
		return err
	}
	res.OwnShiftDeg, res.OwnOffsetM = nav.Some(own), nav.Some(ownOffset)
	res.TextbookOffsetM = nav.Some(book.OffsetM)
	return nil
}

// WithOwnShift is the case with the shift angle of this vessel in place of the
// textbook's, for a manoeuvre that has one.
func (c Case) WithOwnShift(n Name) (Case, error) {
	if ShiftDeg(n) == 0 {
		return c, nil
	}
	own, _, err := c.Model.OwnShiftDeg(n)
	if err != nil {
		return c, fmt.Errorf("own shift angle: %w", err)
	}
	c.ShiftDeg = nav.Some(own)
	return c, nil
}

// Both runs a manoeuvre to both sides.
func Both(n Name, c Case) (port, starboard Result, err error) {
	c.TurnTo = Port
	if port, err = Plan(n, c); err != nil {
		return port, starboard, err
	}
	c.TurnTo = Starboard
	starboard, err = Plan(n, c)
	return port, starboard, err
}

// runSinceFallM is the distance run between the fall and the first order.
func (c Case) runSinceFallM() float64 { return c.Model.SpeedMs * c.Delay.Seconds() }

// setbackPart: a Scharnow turn ends behind its start. It is refused unless the
// distance run since the fall exceeds 1.2 tactical diameters, or what the
// model of this vessel says if that is more: else the vessel ends beyond the
// person and runs away from them. 1.2 is a safe default for the Mariner class
// (setback 1.13 to 1.24 km against tactical diameters of 1.03 to 1.06 km, from
// its published coefficients).
const setbackPart = 1.2

func (c Case) applies(n Name) error {
	if n != Scharnow {
		return nil
	}
	need := setbackPart * 2 * c.Model.RadiusM
	if t, err := c.Model.Trial(Scharnow, scharnowShift); err == nil {
		need = math.Max(need, -t.AlongM)
	}
	if run := c.runSinceFallM(); run < need {
		return fmt.Errorf("%w: it ends %.0f m behind the start of the turn, and only %.0f m were run since the fall: the vessel would end beyond the person",
			ErrManoeuvre, need, run)
	}
	return nil
}

// sequence is the sequence of a manoeuvre for this case.
func (c Case) sequence(n Name) ([]phase, error) {
	switch n {
	case RaceTrack:
		return []phase{
			{helm: 1, until: raceTrackTurn, rising: true, code: HelmOver, word: "hard over to the side of the fall"},
			{hold: true, until: raceTrackTurn, abaftDeg: raceTrackAbaft, code: Steady, word: "steady, run until the person is well abaft the beam"},
			{helm: 1, until: 2*raceTrackTurn - midshipsShort, rising: true, code: HelmOver, word: "hard over to the same side"},
			{helm: 0, until: 2 * raceTrackTurn, rising: true, code: Midships, word: "midships, steady on the old course"},
		}, nil
	case SlowCircle:
		return []phase{
			{helm: 1, slow: true, until: 360, rising: true, facing: true, code: IdleTurn, word: "engine to neutral, helm to the side of the fall so that the stern swings clear; then round slowly"},
		}, nil
	}
	return sequence(n, c.ShiftDeg.Or(ShiftDeg(n)))
}

// raceTrackAbaft: the second turn begins when the person is 30 to 45 degrees
// abaft the beam (common practice, from memory); the middle is taken.
const raceTrackAbaft = 90 + 37.5

// cautionsFor is what to take care of in a manoeuvre, with what holds for all.
func cautionsFor(n Name) []string {
	return append(slices.Clone(cautions[n]),
		"propeller: out of gear whenever the person may be near it",
		"traffic and shoal water: nothing here has looked at a chart; a lee shore bounds the turn",
		"under sail with the engine on: the boom goes over in a turn through the wind's eye or stern, and lines may be in the water")
}

// cautions of the manoeuvres (common practice, as the summaries of the IAMSAR
// Manual vol. III and of Transport Canada TP10038 that were read have it).
var cautions = map[Name][]string{
	Single:     {"propeller: the stern swings towards the side of the fall only when the helm is put the other way", "the approach is not straight; keep the person in sight"},
	Williamson: {"the vessel goes far from the person before it comes back", "60 degrees is a textbook figure; the vessel's own angle is shown beside it"},
	Scharnow:   {"only when the time of the fall is known", "it ends behind the start of the turn"},
	RaceTrack:  {"longer than a single turn; the run in is straight"},
	SlowCircle: {"engine out of gear before the person comes near the propeller"},
}
