package main

import (
	"errors"
	"fmt"
	"io"
	"math"
	"time"

	"wakeback/drift/nav"
	"wakeback/drift/sky"
)

type bearingCmd struct {
	From string `arg:"" help:"Where from."`
	To   string `arg:"" help:"Where to."`
	At   string `help:"When, for the magnetic variation: 2026-07-01T12:00:00Z. Now, when not given." placeholder:"TIME"`
	JSON bool   `name:"json" help:"Print one JSON document."`
}

// Help is shown by wakeback bearing --help.
func (bearingCmd) Help() string {
	return `Positions are on WGS 84, in any usual form, each as one argument:

  wakeback bearing 54.1,7.9 "54 06.00N 008 04.00E"
  wakeback bearing "54°06.0'N 7°54'E" "S33 51.5 E151 12.9"
  wakeback bearing 54.1,7.9 54.2,8.1 --at 2026-07-01T12:00:00Z --json

The bearing is that of the shortest line, at its start. Magnetic variation is that of the start, from the World Magnetic Model; where the model does not hold, the magnetic bearing is left out.`
}

// bearingResult is the JSON document. What is not known is null.
type bearingResult struct {
	From          nav.Position              `json:"from"`
	To            nav.Position              `json:"to"`
	At            time.Time                 `json:"at"`
	RangeM        float64                   `json:"range_m"`
	RangeNM       float64                   `json:"range_nm"`
	BearingDeg    nav.Opt[nav.TrueDeg]      `json:"bearing_deg"`
	BearingMagDeg nav.Opt[nav.MagneticDeg]  `json:"bearing_mag_deg"`
	FinalDeg      nav.Opt[nav.TrueDeg]      `json:"final_bearing_deg"`
	VariationDeg  nav.Opt[nav.VariationDeg] `json:"variation_deg"`
	VariationErr  nav.Opt[float64]          `json:"variation_error_deg"`
	VariationNote string                    `json:"variation_note,omitempty"`
}

// Run prints range and bearing.
func (c *bearingCmd) Run(e *env) error {
	r, err := c.solve(e)
	if err != nil {
		return err
	}
	if r.VariationNote != "" {
		fmt.Fprintln(e.err, "wakeback: no magnetic bearing:", r.VariationNote)
	}
	if c.JSON {
		return e.printJSON(r)
	}
	return table(e.out, r.print)
}

func (c *bearingCmd) solve(e *env) (r bearingResult, err error) {
	if r.From, err = position("FROM", c.From); err != nil {
		return r, err
	}
	if r.To, err = position("TO", c.To); err != nil {
		return r, err
	}
	if r.At, err = e.when("--at", c.At); err != nil {
		return r, err
	}
	line := nav.Inverse(r.From, r.To)
	r.RangeM, r.RangeNM = line.RangeM, line.RangeM/nav.MetresPerNM
	r.BearingDeg, r.FinalDeg = line.Bearing, line.FinalBearing
	return r, r.magnetic()
}

// magnetic adds what needs the earth's field. A date or a place where the
// model does not hold takes nothing from the true bearing.
func (r *bearingResult) magnetic() error {
	v, err := sky.Variation(r.From, 0, r.At)
	if errors.Is(err, sky.ErrOutsideValidity) {
		r.VariationNote = err.Error()
		return nil
	}
	if err != nil {
		return fmt.Errorf("magnetic variation: %w", err)
	}
	if v.State != sky.FieldGood {
		r.VariationNote = v.State.String()
	}
	variation, ok := v.Usable().Get()
	if !ok {
		return nil
	}
	r.VariationDeg, r.VariationErr = nav.Some(variation), nav.Some(v.ErrorDeg)
	if b, ok := r.BearingDeg.Get(); ok {
		r.BearingMagDeg = nav.Some(b.Magnetic(variation))
	}
	return nil
}

func (r bearingResult) print(w io.Writer) {
	fmt.Fprintf(w, "From\t%s\nTo\t%s\n", r.From, r.To)
	fmt.Fprintf(w, "Range\t%.3f nm, %.1f m\n", r.RangeNM, r.RangeM)
	fmt.Fprintf(w, "Bearing\t%s\n", r.bearingWords())
	if v, ok := r.VariationDeg.Get(); ok {
		side := "E"
		if v < 0 {
			side = "W"
		}
		fmt.Fprintf(w, "Variation\t%.1f°%s on %s, one standard deviation %.1f°\n",
			math.Abs(float64(v)), side, r.At.Format(time.DateOnly), r.VariationErr.Or(0))
	}
}

func (r bearingResult) bearingWords() string {
	b, ok := r.BearingDeg.Get()
	if !ok {
		return "none: it is the same place"
	}
	text := fmt.Sprintf("%05.1f° true", compass(float64(b)))
	if m, ok := r.BearingMagDeg.Get(); ok {
		text += fmt.Sprintf(", %05.1f° magnetic", compass(float64(m)))
	}
	return text
}

// compass rounds a direction to a tenth of a degree, without printing 360.0.
func compass(deg float64) float64 { return math.Mod(math.Round(deg*10)/10, 360) }
