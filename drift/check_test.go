package drift_test

import (
	"encoding/csv"
	"math"
	"os"
	"strconv"
	"strings"
	"testing"
	"time"

	"wakeback/drift"
	"wakeback/drift/nav"
)

// table reads a file of testdata, header left out.
func table(t testing.TB, name string) [][]string {
	t.Helper()
	f, err := os.Open("testdata/" + name)
	if err != nil {
		t.Fatal(err)
	}
	defer f.Close()
	r := csv.NewReader(f)
	r.Comment = '#'
	rows, err := r.ReadAll()
	if err != nil {
		t.Fatal(err)
	}
	return rows[1:]
}

// figures are the numbers of the column of a check value that says what to
// expect.
func figures(t testing.TB, id string) []float64 {
	t.Helper()
	for _, row := range table(t, "check-values.csv") {
		if row[0] != id {
			continue
		}
		var out []float64
		for _, f := range strings.FieldsFunc(row[3], func(r rune) bool { return !strings.ContainsRune("0123456789.-", r) }) {
			if v, err := strconv.ParseFloat(f, 64); err == nil {
				out = append(out, v)
			}
		}
		return out
	}
	t.Fatalf("no check value %s", id)
	return nil
}

func number(t testing.TB, s string) float64 {
	t.Helper()
	v, err := strconv.ParseFloat(s, 64)
	if err != nil {
		t.Fatal(err)
	}
	return v
}

// SV1 to SV6: the survival formula, to the hundredth of a minute printed.
func TestHaywardCheckValues(t *testing.T) {
	for id, c := range map[string]float64{"SV1": 0, "SV2": 5, "SV3": 10, "SV4": 15, "SV5": 20} {
		d, ok := drift.Hayward(c).Get()
		if !ok {
			t.Fatalf("%s: absent", id)
		}
		near(t, id, d.Minutes(), figures(t, id)[0], 0.005)
	}
	for _, c := range []float64{20.1, 23.08, 23.09, 30, 40, -3, math.NaN(), math.Inf(1)} {
		if drift.Hayward(c).IsSet() {
			t.Errorf("SV6: a figure at %v °C", c)
		}
	}
}

// LW1: a person in 15 kn.
func TestLeewayLW1(t *testing.T) {
	want := figures(t, "LW1")
	l := drift.LeewayAt(class(t, "person"), nav.BlowingFrom(240, 15))
	near(t, "speed", l.Downwind.SpeedKn(), want[0], 0.0005)
	for i, v := range []nav.Velocity{l.Downwind, l.Left, l.Right} {
		near(t, "direction", float64(v.Direction().Or(-1)), want[1+i], 1e-9)
		near(t, "speed", v.SpeedKn(), l.Downwind.SpeedKn(), 1e-12)
	}
}

// LW2: the same for two hours with a current, to the last digit printed.
func TestDatumLW2(t *testing.T) {
	want := figures(t, "LW2")
	at := clock("10:00")
	c := drift.Case{
		Start: drift.Start{Position: position(t, "50N 001W")}, FellFrom: at, FellTo: at, Class: class(t, "person"),
		Winds: winds(t, windFrom(at, 240, 15)), Currents: currents(t, currentFrom(at, 100, 1.2)),
	}
	d := datumAt(t, c, at.Add(2*time.Hour))
	check := func(what string, p nav.Opt[nav.Position], bearing, nm float64) {
		t.Helper()
		line := nav.Inverse(c.Start.Position, p.Or(nav.Position{}))
		near(t, what+" bearing", float64(line.Bearing.Or(-1)), bearing, 0.005)
		near(t, what+" range", line.RangeM/nav.MetresPerNM, nm, 0.00005)
	}
	check("datum", d.Point, want[0], want[1])
	check("left", d.Left, want[2], want[3])
	check("right", d.Right, want[4], want[5])
}

// LW3: a negative offset does not blow anything to windward.
func TestLeewayLW3(t *testing.T) {
	l := drift.LeewayAt(class(t, "RAFT_SHALLOW_CAPSIZED"), nav.BlowingFrom(0, 5))
	if got, want := l.Downwind.SpeedMs(), figures(t, "LW3")[0]; got != want {
		t.Errorf("leeway %v, want %v", got, want)
	}
}

// LW4 and what else was measured at sea: the open boat's own figures through
// the same formula, and classes of the table that are about the same thing.
func TestLeewayMeasured(t *testing.T) {
	measured := map[string]float64{}
	for _, row := range table(t, "leeway-measured-seen.csv") {
		if row[2] != "" {
			measured[row[0]+" "+row[1]] = number(t, row[2]) / 100
		}
	}
	want := figures(t, "LW4")
	for i, state := range []string{"upright", "swamped"} {
		boat := drift.Class{ID: "boat", Slope: measured["5.5 m wooden open boat "+state]}
		near(t, state, boat.SpeedMs(10), want[i], 0.0005)
	}
	for _, c := range []struct {
		class, object string
		within        float64 // of the measured: the spread of one class
	}{
		{"skiff-swamped", "5.5 m wooden open boat swamped", 0.05},
		{"skiff-flat-bottom", "5.5 m wooden open boat upright", 0.3},
		{"raft-deep-capsized", "6-person raft, four small ballast bags, drogue capsized", 0.3},
		{"raft-shallow-drogue", "6-person raft, four small ballast bags, drogue upright", 0.3},
	} {
		slope := measured[c.object]
		if slope == 0 {
			t.Fatalf("no measurement of %q", c.object)
		}
		near(t, c.class, class(t, c.class).SpeedMs(10)/10/slope, 1, c.within)
	}
}

// MK1: pressed late.
func TestFallPointMK1(t *testing.T) {
	want := figures(t, "MK1") // 070, 61.7
	mark := nav.Fix{Position: position(t, "50N 001W"), SogKn: nav.Some(6.0), CogTrue: nav.Some(nav.TrueDeg(250))}
	line := nav.Inverse(mark.Position, drift.FallPoint(mark, 20*time.Second))
	near(t, "bearing", float64(line.Bearing.Or(-1)), want[0], 0.01)
	near(t, "range", line.RangeM, want[1], 0.05)
	mark.CogTrue = nav.None[nav.TrueDeg]()
	if got := drift.FallPoint(mark, 20*time.Second); got != mark.Position {
		t.Errorf("without a course the fall is at %v, want the mark", got)
	}
}

// PR1, PR3 and PR5: radii of the circular normal distribution.
func TestRadii(t *testing.T) {
	near(t, "50 %", drift.Radius50, figures(t, "PR1")[0], 0.5e-5)
	near(t, "95 %", drift.Radius95, figures(t, "PR3")[0], 0.5e-6)
	near(t, "0.3 kn probable, kn", 0.3/drift.Radius50, figures(t, "PR5")[0], 0.5e-5)
}

// Every row of the table of classes against the one gathered from its sources.
func TestClassesAgainstTable(t *testing.T) {
	rows := table(t, "leeway-simple.csv")
	classes, err := drift.Classes()
	if err != nil {
		t.Fatal(err)
	}
	if len(classes) != len(rows) {
		t.Errorf("%d classes, want %d", len(classes), len(rows))
	}
	for _, row := range rows {
		c := class(t, row[0])
		near(t, row[0]+" slope", c.Slope, number(t, row[2]), 1e-12)
		near(t, row[0]+" offset", c.OffsetMs/nav.MsPerKn, number(t, row[3]), 1e-12)
		near(t, row[0]+" divergence", c.DivergenceDeg, number(t, row[4]), 0)
		if c.Source == "" || !c.Derived() {
			t.Errorf("%s: source %q, derived %v", row[0], c.Source, c.Derived())
		}
	}
}

// The derived components against a table of them made by other hands, to the
// last digit it prints (0.001 % and 0.01 cm/s).
func TestDerivedComponents(t *testing.T) {
	for _, row := range table(t, "leeway-components-derived.csv") {
		c := class(t, row[0])
		slope := func(w float64) drift.Leeway { return drift.LeewayAt(c, nav.Velocity{EastMs: w}) }
		// Two winds, both over any floor, give slope and offset.
		a, b := slope(10), slope(20)
		near(t, row[0]+" downwind slope", (b.DownwindMs-a.DownwindMs)*10, number(t, row[1]), 0.0006)
		near(t, row[0]+" downwind offset", (2*a.DownwindMs-b.DownwindMs)*100, number(t, row[2]), 0.006)
		near(t, row[0]+" crosswind slope", (b.CrosswindMs-a.CrosswindMs)*10, number(t, row[3]), 0.0006)
		// The size of the offset: with a negative one the table prints it so.
		near(t, row[0]+" crosswind offset", math.Abs(2*a.CrosswindMs-b.CrosswindMs)*100, number(t, row[4]), 0.006)
	}
}

// The telegraph of sides: crosswind variance at many times.
func TestJibingAgainstClosedForm(t *testing.T) {
	v := closedForm(t)
	k := drift.Components{Right: drift.Regression{Slope: 0.01}, Left: drift.Regression{Slope: -0.01}}
	c := openWater(t, drift.Class{ID: "j", Components: nav.Some(k), JibesPerHour: 0.04}, nav.BlowingFrom(180, 10/nav.MsPerKn), nav.Velocity{}, 0, 0)
	for _, hours := range []string{"3", "12", "24"} {
		want := 0.1 * 3600 * math.Sqrt(value(t, v, "V_s(T="+hours+" h, lambda=0.04/h)"))
		n, _ := strconv.Atoi(hours)
		_, _, sdE, _, _ := pooled(t, c, drift.Model{Step: 5 * time.Minute}, c.FellFrom.Add(time.Duration(n)*time.Hour))
		// Two humps spread less than a normal in their standard deviation; its
		// tolerance serves. Steps of 20 minutes decide: (2 rate dt)²/12 = 6e-5.
		near(t, "SD after "+hours+" h", sdE, want, sdTol(want)+1e-4*want)
	}
}
