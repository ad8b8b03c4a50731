package main

import (
	"fmt"
	"io"
	"time"

	"wakeback/drift/nav"
	"wakeback/search/turn"
)

type turnCmd struct {
	Manoeuvre  string  `arg:"" help:"single, williamson, scharnow, race-track, slow-circle, or best."`
	Heading    string  `required:"" help:"Course before the turn." placeholder:"DEG"`
	Speed      float64 `required:"" help:"Speed through the water, knots." placeholder:"KN"`
	Side       string  `help:"Side of the fall: port or starboard. Left out, both are shown and none is advised." placeholder:"SIDE"`
	TurnRadius float64 `required:"" help:"Radius of the turning circle, metres." placeholder:"M"`
	Delay      float64 `help:"Seconds between the fall and the first order." placeholder:"S"`
	Wind       string  `help:"True wind; its leeway moves the person." placeholder:"DIR/KN"`
	Current    string  `help:"What the water does; it carries vessel and person alike." placeholder:"SET/KN"`
	JSON       bool    `help:"Print one JSON document."`
}

type orderOut struct {
	AtS             float64 `json:"at_s"`
	Order           string  `json:"order"`
	Helm            float64 `json:"helm"` // -1 hard a-port to +1 hard a-starboard
	UntilHeadingDeg float64 `json:"until_heading_deg"`
}

type pointOut struct {
	TS         float64 `json:"t_s"`
	XM         float64 `json:"x_m"`
	YM         float64 `json:"y_m"`
	HeadingDeg float64 `json:"heading_deg"`
}

type turnOut struct {
	Manoeuvre       turn.Name        `json:"manoeuvre"`
	Side            string           `json:"side"` // of the first turn
	Orders          []orderOut       `json:"orders"`
	Path            []pointOut       `json:"path"`
	TurnedS         float64          `json:"turned_s"`
	TotalS          float64          `json:"total_s"`
	ClosestM        float64          `json:"closest_m"`
	OwnShiftDeg     nav.Opt[float64] `json:"own_shift_deg,omitzero"`
	OwnOffsetM      nav.Opt[float64] `json:"own_offset_m,omitzero"`
	TextbookOffsetM nav.Opt[float64] `json:"textbook_offset_m,omitzero"`
	Reason          string           `json:"reason,omitempty"`
	Cautions        []string         `json:"cautions"`
}

// Run runs a manoeuvre through the turning model.
func (c *turnCmd) Run(e *env) error {
	kase, err := c.kase()
	if err != nil {
		return err
	}
	results, err := c.results(kase)
	if err != nil {
		return err
	}
	if c.JSON {
		if len(results) == 1 {
			return e.printJSON(results[0])
		}
		return e.printJSON(map[string]any{"choices": results})
	}
	for i, r := range results {
		if i > 0 {
			fmt.Fprintln(e.out)
		}
		if err := r.table(e.out); err != nil {
			return err
		}
	}
	fmt.Fprintln(e.out, "\nAdvice from a model of this vessel in still water. The master decides.")
	return nil
}

func (c *turnCmd) kase() (turn.Case, error) {
	heading, err := direction("--heading", c.Heading)
	if err != nil {
		return turn.Case{}, err
	}
	for arg, v := range map[string]float64{"--speed": c.Speed, "--turn-radius": c.TurnRadius} {
		if err := more(arg, v); err != nil {
			return turn.Case{}, err
		}
	}
	kase := turn.Case{
		Model: turn.FromRadius(c.Speed, c.TurnRadius), Heading: heading, Delay: time.Duration(c.Delay * float64(time.Second)),
	}
	switch c.Side {
	case "port":
		kase.Side = turn.Port
	case "starboard":
		kase.Side = turn.Starboard
	case "":
	default:
		return kase, badInput("--side", fmt.Errorf("%q, expected port or starboard", c.Side))
	}
	if _, err := setDrift("--current", c.Current); err != nil {
		return kase, err
	}
	kase.PersonDrift, err = leeway(c.Wind)
	return kase, err
}

func (c *turnCmd) results(kase turn.Case) ([]turnOut, error) {
	name := turn.Name(c.Manoeuvre)
	switch {
	case name == "best":
		return best(kase)
	case kase.Side == turn.Unknown:
		port, starboard, err := turn.Both(name, kase)
		if err != nil {
			return nil, err
		}
		return []turnOut{outOf(port, "the side of the fall is unknown: no way is advised"), outOf(starboard, "the side of the fall is unknown: no way is advised")}, nil
	}
	r, err := turn.Plan(name, kase)
	if err != nil {
		return nil, err
	}
	return []turnOut{outOf(r, "")}, nil
}

// best ranks the manoeuvres: seen and at once without a delay, reported with one.
func best(kase turn.Case) ([]turnOut, error) {
	sight := turn.InSight
	if kase.Delay > 0 {
		sight = turn.Reported
	}
	choices, refused := turn.Best(kase, sight)
	if len(choices) == 0 {
		return nil, refused
	}
	var out []turnOut
	for _, ch := range choices {
		out = append(out, outOf(ch.Result, ch.Reason))
	}
	return out, nil
}

func outOf(r turn.Result, reason string) turnOut {
	o := turnOut{
		Manoeuvre: r.Name, Side: r.Side.String(), TurnedS: tenth(r.TurnedS), TotalS: tenth(r.TotalS), ClosestM: tenth(r.ClosestM),
		OwnShiftDeg: r.OwnShiftDeg, OwnOffsetM: r.OwnOffsetM, TextbookOffsetM: r.TextbookOffsetM, Reason: reason, Cautions: r.Cautions,
	}
	for _, ord := range r.Orders {
		o.Orders = append(o.Orders, orderOut{tenth(ord.AtS), ord.Word, float64(ord.Helm), tenth(float64(ord.Until))})
	}
	for _, p := range r.Path {
		o.Path = append(o.Path, pointOut{tenth(p.TS), hundredth(p.Offset.EastM), hundredth(p.Offset.NorthM), tenth(float64(p.HeadingDeg))})
	}
	return o
}

func (o turnOut) table(w io.Writer) error {
	fmt.Fprintf(w, "%s, to %s\n", o.Manoeuvre, o.Side)
	if o.Reason != "" {
		fmt.Fprintln(w, o.Reason)
	}
	err := table(w, func(w io.Writer) {
		fmt.Fprintln(w, "at\torder\tuntil")
		for _, ord := range o.Orders {
			fmt.Fprintf(w, "%.0f s\t%s\t%s\n", ord.AtS, ord.Order, nav.TrueDeg(ord.UntilHeadingDeg))
		}
	})
	fmt.Fprintf(w, "turned after %.0f s, back at the person after %.0f s, closest %.0f m\n", o.TurnedS, o.TotalS, o.ClosestM)
	if shift, ok := o.OwnShiftDeg.Get(); ok {
		fmt.Fprintf(w, "textbook angle ends %.0f m off the track; %.0f degrees would end %.0f m off it on this vessel\n",
			o.TextbookOffsetM.Or(0), shift, o.OwnOffsetM.Or(0))
	}
	for _, c := range o.Cautions {
		fmt.Fprintln(w, "caution:", c)
	}
	return err
}
