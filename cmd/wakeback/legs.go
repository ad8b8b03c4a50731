package main

import (
	"fmt"
	"io"
	"time"

	"wakeback/drift/nav"
	"wakeback/search/pattern"
)

type legsCmd struct {
	Square   squareCmd `cmd:"" help:"Expanding square around the datum."`
	Sector   sectorCmd `cmd:"" help:"Sector search through the datum."`
	Parallel sweepCmd  `cmd:"" help:"Parallel sweep: legs along the long side of an area."`
	Creeping sweepCmd  `cmd:"" help:"Creeping line: legs along the short side of an area."`
	Track    trackCmd  `cmd:"" help:"Along a track, one way, or there and back with a spacing."`
}

// ride is how the legs are run; all patterns have it.
type ride struct {
	Speed      float64 `help:"Speed through the water, knots." default:"5" placeholder:"KN"`
	Current    string  `help:"What the water does over the ground." placeholder:"SET/KN"`
	DatumDrift string  `help:"What the datum does over the ground; the legs ride along with it." placeholder:"SET/KN"`
	Begin      string  `help:"When the first leg begins; now when left out." placeholder:"TIME"`
	JSON       bool    `help:"Print one JSON document."`
}

type legOut struct {
	N               int             `json:"n"`
	Kind            pattern.LegKind `json:"kind"`
	CourseDeg       float64         `json:"course_deg"`
	LengthM         float64         `json:"length_m"`
	SteerDeg        float64         `json:"steer_deg"`
	GroundCourseDeg float64         `json:"ground_course_deg"`
	RunS            float64         `json:"run_s"`
	BeginAt         time.Time       `json:"begin_at"`
	Start           nav.Position    `json:"start"`
	End             nav.Position    `json:"end"`
}

type legsOut struct {
	Legs   []legOut `json:"legs"`
	TotalM float64  `json:"total_m"`
	TotalS float64  `json:"total_s"`
}

// print rides the legs and prints them.
func (r ride) print(e *env, legs []pattern.Leg, datum nav.Position) error {
	if err := more("--speed", r.Speed); err != nil {
		return err
	}
	current, err := setDrift("--current", r.Current)
	if err != nil {
		return err
	}
	drift, err := setDrift("--datum-drift", r.DatumDrift)
	if err != nil {
		return err
	}
	begin, err := e.when("--begin", r.Begin)
	if err != nil {
		return err
	}
	runs, err := pattern.Ride(legs, datum, begin, pattern.Water{SpeedKn: r.Speed, Current: current, DatumDrift: drift})
	if err != nil {
		return err
	}
	out := legsOut{TotalM: pattern.LengthM(legs)}
	for i, run := range runs {
		out.TotalS += run.RunS
		out.Legs = append(out.Legs, legOut{
			N: i + 1, Kind: run.Kind, CourseDeg: float64(run.Course), LengthM: run.LengthM, SteerDeg: float64(run.Steer),
			GroundCourseDeg: float64(run.Ground), RunS: run.RunS, BeginAt: run.Begin, Start: run.Start, End: run.End,
		})
	}
	if r.JSON {
		return e.printJSON(out)
	}
	return out.table(e.out, drift.SpeedKn() > 0)
}

func (o legsOut) table(w io.Writer, rides bool) error {
	err := table(w, func(w io.Writer) {
		fmt.Fprintln(w, "leg\tsteer\tfor\tlength\tbegins\tcourse over ground\tends at")
		for _, l := range o.Legs {
			fmt.Fprintf(w, "%d\t%s\t%s\t%.3f nm\t%s\t%s\t%s\n", l.N, nav.TrueDeg(l.SteerDeg), minutes(l.RunS),
				l.LengthM/nav.MetresPerNM, l.BeginAt.UTC().Format("15:04:05"), nav.TrueDeg(l.GroundCourseDeg), l.End)
		}
	})
	if err != nil {
		return err
	}
	fmt.Fprintf(w, "\n%.2f nm in %s. Times are UTC, directions true, headings through the water.\n", o.TotalM/nav.MetresPerNM, minutes(o.TotalS))
	if rides {
		fmt.Fprintln(w, "The legs ride along with the datum: where they end is over the ground.")
	}
	fmt.Fprintln(w, "A plan is not a search: only what was run was searched. The rescue authority decides.")
	return nil
}

func minutes(s float64) string {
	return (time.Duration(s+0.5) * time.Second).String()
}

func side(arg, text string) (pattern.Turns, error) {
	switch text {
	case "right":
		return pattern.Right, nil
	case "left":
		return pattern.Left, nil
	}
	return 0, badInput(arg, fmt.Errorf("%q, expected right or left", text))
}

type squareCmd struct {
	Datum   string  `required:"" help:"Where the search begins." placeholder:"POS"`
	Spacing float64 `required:"" help:"Between the legs, nautical miles." placeholder:"NM"`
	First   string  `required:"" help:"Course of the first leg." placeholder:"DEG"`
	Legs    int     `help:"How many legs." default:"8"`
	Turns   string  `help:"Turn right or left." default:"right"`
	ride
}

// Run lays an expanding square.
func (c *squareCmd) Run(e *env) error {
	datum, err := position("--datum", c.Datum)
	if err != nil {
		return err
	}
	first, err := direction("--first", c.First)
	if err != nil {
		return err
	}
	turns, err := side("--turns", c.Turns)
	if err != nil {
		return err
	}
	legs, err := pattern.Square(first, c.Spacing*nav.MetresPerNM, c.Legs, turns)
	if err != nil {
		return err
	}
	return c.print(e, legs, datum)
}

type sectorCmd struct {
	Datum  string  `required:"" help:"Where the sectors meet." placeholder:"POS"`
	Radius float64 `required:"" help:"Length of a leg, nautical miles." placeholder:"NM"`
	First  string  `required:"" help:"Course of the first leg." placeholder:"DEG"`
	Passes int     `help:"How many passes; the second is turned by 30 degrees." default:"1"`
	Turns  string  `help:"Turn right or left." default:"right"`
	ride
}

// Run lays a sector search.
func (c *sectorCmd) Run(e *env) error {
	datum, err := position("--datum", c.Datum)
	if err != nil {
		return err
	}
	first, err := direction("--first", c.First)
	if err != nil {
		return err
	}
	turns, err := side("--turns", c.Turns)
	if err != nil {
		return err
	}
	legs, err := pattern.Sector(first, c.Radius*nav.MetresPerNM, c.Passes, turns)
	if err != nil {
		return err
	}
	return c.print(e, legs, datum)
}

type sweepCmd struct {
	Start   string  `required:"" help:"Where the first leg begins." placeholder:"POS"`
	Along   string  `required:"" help:"Course of the first leg." placeholder:"DEG"`
	Length  float64 `required:"" help:"Length of a search leg, nautical miles." placeholder:"NM"`
	Spacing float64 `required:"" help:"Between the legs, nautical miles." placeholder:"NM"`
	Legs    int     `required:"" help:"How many search legs."`
	Side    string  `help:"To which side of the first leg the others lie: right or left." default:"right"`
	ride
}

// Run lays a parallel sweep or a creeping line: the legs are found alike.
func (c *sweepCmd) Run(e *env) error {
	start, err := position("--start", c.Start)
	if err != nil {
		return err
	}
	along, err := direction("--along", c.Along)
	if err != nil {
		return err
	}
	s, err := side("--side", c.Side)
	if err != nil {
		return err
	}
	legs, err := pattern.Sweep(nav.Offset{}, along, c.Length*nav.MetresPerNM, c.Spacing*nav.MetresPerNM, c.Legs, s)
	if err != nil {
		return err
	}
	return c.print(e, legs, start)
}

type trackCmd struct {
	Along   []string `required:"" help:"A point of the track; give it two or more times." placeholder:"POS" sep:"none"`
	Spacing float64  `help:"There and back with this spacing, nautical miles; one way when left out." placeholder:"NM"`
	ride
}

// Run lays legs along a track.
func (c *trackCmd) Run(e *env) error {
	var points []nav.Offset
	var first nav.Position
	for i, text := range c.Along {
		p, err := position("--along", text)
		if err != nil {
			return err
		}
		if i == 0 {
			first = p
		}
		points = append(points, nav.NewPlane(first).Offset(p))
	}
	legs, err := pattern.Track(points, c.Spacing*nav.MetresPerNM)
	if err != nil {
		return err
	}
	return c.print(e, legs, first)
}
