package main

import (
	"errors"
	"fmt"
	"io"
	"os"
	"time"

	"wakeback/drift"
	"wakeback/drift/nav"
	"wakeback/drift/weather"
)

type driftCmd struct {
	Mark      string  `help:"Where the fall happened." placeholder:"POS"`
	Marked    string  `help:"When the fall happened." placeholder:"TIME"`
	At        string  `help:"For when; now when left out." placeholder:"TIME"`
	Object    string  `help:"Class of leeway; see --classes." default:"person" placeholder:"CLASS"`
	Wind      string  `help:"True wind: where it blows from, and knots at 10 m." placeholder:"DIR/KN"`
	Current   string  `help:"What the water does over the ground." placeholder:"SET/KN"`
	MarkError float64 `help:"Radius in metres that holds the place of the fall in 95 of 100 cases." placeholder:"M"`
	Seed      uint64  `help:"Seed of the cloud; the same seed gives the same cloud." default:"1"`
	Particles int     `help:"Members of the cloud." default:"5000"`
	Worksheet bool    `help:"Print the worksheet, step by step."`
	Classes   bool    `help:"List the classes of leeway with their sources."`
	SVG       string  `name:"svg" help:"Write a picture of the cloud to a file." placeholder:"FILE" type:"path"`
	JSON      bool    `help:"Print one JSON document."`
}

type driftOut struct {
	At          time.Time                `json:"at"`
	Leeway      leewayOut                `json:"leeway"`
	Datum       nav.Position             `json:"datum"`
	DatumLeft   nav.Opt[nav.Position]    `json:"datum_left"`
	DatumRight  nav.Opt[nav.Position]    `json:"datum_right"`
	TotalErrorM float64                  `json:"total_error_m"` // probable: half of all cases
	Error95M    float64                  `json:"error_95_m"`
	Cloud       cloudOut                 `json:"cloud"`
	Cautions    []string                 `json:"cautions"`
	Worksheet   nav.Opt[drift.Worksheet] `json:"worksheet,omitzero"`
}

type leewayOut struct {
	SpeedKn       float64              `json:"speed_kn"`
	TowardsDeg    nav.Opt[nav.TrueDeg] `json:"towards_deg"`
	DivergenceDeg float64              `json:"divergence_deg"`
	Range         string               `json:"range"`
}

type cloudOut struct {
	N        int          `json:"n"`
	Mean     nav.Position `json:"mean"`
	SDMajorM float64      `json:"sd_major_m"`
	SDMinorM float64      `json:"sd_minor_m"`
	AxisDeg  float64      `json:"axis_deg"`
	R50M     float64      `json:"r50_m"`
	R95M     float64      `json:"r95_m"`
}

// Run works the drift out by vector sum and by the cloud, side by side.
func (c *driftCmd) Run(e *env) error {
	if c.Classes {
		return c.classes(e)
	}
	kase, at, err := c.kase(e)
	if err != nil {
		return err
	}
	d, err := drift.DatumAt(kase, at)
	if err != nil {
		return err
	}
	if c.Particles < 1 || c.Particles > 1_000_000 {
		return badInput("--particles", fmt.Errorf("expected 1 to 1000000"))
	}
	cloud, err := drift.NewCloud(kase, drift.Options{Members: c.Particles, Seed: c.Seed})
	if err != nil {
		return err
	}
	if err := cloud.Advance(at); err != nil {
		return err
	}
	if c.SVG != "" {
		if err := writePicture(c.SVG, cloud, d); err != nil {
			return err
		}
	}
	out := describe(d, cloud.Spread(), at)
	if c.Worksheet {
		out.Worksheet = nav.Some(d.Worksheet(kase))
	}
	if c.JSON {
		return e.printJSON(out)
	}
	return out.table(e.out)
}

// writePicture draws the cloud and the datum to a file.
func writePicture(path string, cloud *drift.Cloud, d drift.Datum) error {
	f, err := os.Create(path)
	if err != nil {
		return fmt.Errorf("write the picture: %w", err)
	}
	if err := errors.Join(cloud.SVG(f, d), f.Close()); err != nil {
		return fmt.Errorf("write the picture %s: %w", path, err)
	}
	return nil
}

// kase reads the case from the flags.
func (c *driftCmd) kase(e *env) (kase drift.Case, at time.Time, err error) {
	if c.Mark == "" || c.Marked == "" {
		return kase, at, badInput("--mark and --marked", fmt.Errorf("expected where and when the fall happened"))
	}
	mark, err := position("--mark", c.Mark)
	if err != nil {
		return kase, at, err
	}
	fell, err := e.when("--marked", c.Marked)
	if err != nil {
		return kase, at, err
	}
	if at, err = e.when("--at", c.At); err != nil {
		return kase, at, err
	}
	class, err := drift.ClassByID(c.Object)
	if err != nil {
		return kase, at, badInput("--object", err)
	}
	kase = drift.Case{Start: drift.Start{Position: mark}, FellFrom: fell, FellTo: fell, Class: class}
	if c.MarkError > 0 {
		kase.Start.Error95M = nav.Some(c.MarkError)
	}
	return kase, at, c.weather(&kase, fell)
}

func (c *driftCmd) weather(kase *drift.Case, from time.Time) error {
	kase.Winds, _ = weather.NewWinds()
	kase.Currents, _ = weather.NewCurrents()
	if c.Wind != "" {
		dir, kn, err := nav.ParseDirSpeed(c.Wind)
		if err != nil {
			return badInput("--wind", err)
		}
		s := weather.Sample{From: from, Velocity: nav.BlowingFrom(dir, kn), Source: weather.Person, Name: "--wind", Said: from}
		if err := kase.Winds.Add(s); err != nil {
			return badInput("--wind", err)
		}
	}
	if c.Current != "" {
		v, err := setDrift("--current", c.Current)
		if err != nil {
			return err
		}
		s := weather.Sample{From: from, Velocity: v, Source: weather.Person, Name: "--current", Said: from}
		if err := kase.Currents.Add(s); err != nil {
			return badInput("--current", err)
		}
	}
	return nil
}

func describe(d drift.Datum, s drift.Spread, at time.Time) driftOut {
	cautions := d.Cautions
	if cautions == nil {
		cautions = []string{}
	}
	return driftOut{
		At: at, Datum: d.Point.Or(nav.Position{}), DatumLeft: d.Left, DatumRight: d.Right,
		TotalErrorM: d.TotalProbableErrorM, Error95M: d.Error95M, Cautions: cautions,
		Leeway: leewayOut{
			SpeedKn: d.Leeway.Downwind.SpeedKn(), TowardsDeg: d.Leeway.Downwind.Direction(),
			DivergenceDeg: d.Leeway.DivergenceDeg, Range: string(d.Leeway.Range),
		},
		Cloud: cloudOut{
			N: s.N, Mean: s.MeanPosition, SDMajorM: s.SDMajorM, SDMinorM: s.SDMinorM, AxisDeg: s.AxisDeg, R50M: s.R50M, R95M: s.R95M,
		},
	}
}

func (o driftOut) table(w io.Writer) error {
	if ws, ok := o.Worksheet.Get(); ok {
		fmt.Fprintln(w, ws)
	}
	err := table(w, func(w io.Writer) {
		fmt.Fprintf(w, "at\t%s\n", o.At.UTC().Format(time.RFC3339))
		fmt.Fprintf(w, "where to look\t%s\n", o.Datum)
		if l, ok := o.DatumLeft.Get(); ok {
			fmt.Fprintf(w, "if it went left\t%s\n", l)
		}
		if r, ok := o.DatumRight.Get(); ok {
			fmt.Fprintf(w, "if it went right\t%s\n", r)
		}
		fmt.Fprintf(w, "error\t%.0f m holds half of all cases, %.0f m holds 95 of 100\n", o.TotalErrorM, o.Error95M)
		towards := "nowhere"
		if t, ok := o.Leeway.TowardsDeg.Get(); ok {
			towards = t.String()
		}
		fmt.Fprintf(w, "leeway\t%.2f kn to %s, %.0f degrees to either side; %s\n", o.Leeway.SpeedKn, towards, o.Leeway.DivergenceDeg, o.Leeway.Range)
		fmt.Fprintf(w, "cloud of %d\tmiddle %s\n", o.Cloud.N, o.Cloud.Mean)
		fmt.Fprintf(w, "\t%.0f m holds half, %.0f m holds 95 of 100; longest towards %03.0f, %.0f by %.0f m (one sd)\n",
			o.Cloud.R50M, o.Cloud.R95M, o.Cloud.AxisDeg, o.Cloud.SDMajorM, o.Cloud.SDMinorM)
	})
	for _, c := range o.Cautions {
		fmt.Fprintln(w, "caution:", c)
	}
	fmt.Fprintln(w, "Advice from a model. The rescue centre commands the search.")
	return err
}

func (c *driftCmd) classes(e *env) error {
	classes, err := drift.Classes()
	if err != nil {
		return err
	}
	if c.JSON {
		return e.printJSON(map[string]any{"classes": classList(classes)})
	}
	return table(e.out, func(w io.Writer) {
		fmt.Fprintln(w, "class\twhat it is\tof the wind\tplus kn\tto either side\tsource")
		for _, k := range classes {
			fmt.Fprintf(w, "%s\t%s\t%.1f %%\t%+.2f\t%.0f deg\t%s\n", k.ID, k.Object, k.Slope*100, k.OffsetMs/nav.MsPerKn, k.DivergenceDeg, k.Source)
		}
	})
}

func classList(classes []drift.Class) []map[string]any {
	var out []map[string]any
	for _, k := range classes {
		out = append(out, map[string]any{
			"id": k.ID, "object": k.Object, "slope": k.Slope, "offset_kn": k.OffsetMs / nav.MsPerKn,
			"divergence_deg": k.DivergenceDeg, "source": k.Source,
		})
	}
	return out
}
