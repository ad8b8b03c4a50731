package drift_test

import (
	"math"
	"testing"
	"time"

	"wakeback/drift"
	"wakeback/drift/nav"
	"wakeback/drift/weather"
)

func clock(hhmm string) time.Time {
	t, err := time.Parse("2006-01-02 15:04", "2026-06-01 "+hhmm)
	if err != nil {
		panic(err)
	}
	return t
}

func position(t testing.TB, s string) nav.Position {
	t.Helper()
	p, err := nav.ParsePosition(s)
	if err != nil {
		t.Fatal(err)
	}
	return p
}

func currentFrom(at time.Time, set nav.TrueDeg, kn float64) weather.Sample {
	return weather.Sample{From: at, Velocity: nav.Towards(set, kn), Source: weather.Person, Name: "navigator", Said: at}
}

func windFrom(at time.Time, from nav.TrueDeg, kn float64) weather.Sample {
	return weather.Sample{From: at, Velocity: nav.BlowingFrom(from, kn), Source: weather.Person, Name: "helm", Said: at}
}

func currents(t testing.TB, s ...weather.Sample) weather.History {
	t.Helper()
	h, err := weather.NewCurrents(s...)
	if err != nil {
		t.Fatal(err)
	}
	return h
}

func winds(t testing.TB, s ...weather.Sample) weather.History {
	t.Helper()
	h, err := weather.NewWinds(s...)
	if err != nil {
		t.Fatal(err)
	}
	return h
}

func class(t testing.TB, id string) drift.Class {
	t.Helper()
	c, err := drift.ClassByID(id)
	if err != nil {
		t.Fatal(err)
	}
	return c
}

func datumAt(t testing.TB, c drift.Case, at time.Time) drift.Datum {
	t.Helper()
	d, err := drift.DatumAt(c, at)
	if err != nil {
		t.Fatal(err)
	}
	return d
}

// near fails unless got is within tol of want.
func near(t testing.TB, what string, got, want, tol float64) {
	t.Helper()
	if !(math.Abs(got-want) <= tol) {
		t.Errorf("%s = %v, want %v ± %v", what, got, want, tol)
	}
}

// The scenarios state figures to the last digit shown; tolerances are half of
// that digit.

// Scenario 11: drift while returning, by stream alone.
func TestScenario11DriftWhileReturning(t *testing.T) {
	mark := position(t, "50 40.000N 001 10.000W")
	c := drift.Case{
		Start: drift.Start{Position: mark}, FellFrom: clock("10:00"), FellTo: clock("10:00"), Class: class(t, "person"),
		Winds: winds(t, windFrom(clock("10:00"), 0, 0)), Currents: currents(t, currentFrom(clock("10:00"), 90, 1.8)),
	}
	d := datumAt(t, c, clock("10:12"))
	got, ok := d.Point.Get()
	if !ok {
		t.Fatal("no datum")
	}
	near(t, "moved, NM", d.Shift.RangeM()/nav.MetresPerNM, 0.36, 0.005)
	near(t, "latitude, minutes", (got.LatDeg()-50)*60, 40.000, 0.0005)
	// The scenario takes a minute of latitude for a mile, on a sphere; at this
	// latitude the ellipsoid's minute of longitude is 0.4 % longer: 0.0022'.
	near(t, "longitude, minutes west", (-got.LonDeg()-1)*60, 9.432, 0.0025)
	if c.Start.Position != mark {
		t.Error("the mark moved")
	}
	if d.Left.IsSet() || d.Right.IsSet() {
		t.Error("no wind, yet a datum to the left or right")
	}
}

// Scenario 23: the wind shifts; leeway is made of two pieces.
func TestScenario23WindShift(t *testing.T) {
	fixture := drift.Class{ID: "fixture", Slope: 0.015}
	c := drift.Case{
		Start: drift.Start{Position: position(t, "50N 001W")}, FellFrom: clock("10:00"), FellTo: clock("10:00"), Class: fixture,
		Winds:    winds(t, windFrom(clock("10:00"), 220, 18), windFrom(clock("10:35"), 290, 24)),
		Currents: currents(t, currentFrom(clock("10:00"), 0, 0)),
	}
	d := datumAt(t, c, clock("11:00"))
	near(t, "leeway, m", d.Shift.RangeM(), 467, 0.5)
	near(t, "leeway, NM", d.Shift.RangeM()/nav.MetresPerNM, 0.252, 0.0005)
	near(t, "leeway towards", float64(d.Shift.Direction().Or(-1)), 74, 0.5)
	newest := nav.Along(110, 0.36*nav.MetresPerNM)
	near(t, "the newest wind for all the time is wrong by, m", d.Shift.Sub(newest).RangeM(), 400, 5)
}

// Scenario 24: the tide turns through slack water.
func TestScenario24TideTurns(t *testing.T) {
	c := drift.Case{
		Start: drift.Start{Position: position(t, "50N 001W")}, FellFrom: clock("10:50"), FellTo: clock("10:50"), Class: class(t, "person"),
		Winds: winds(t, windFrom(clock("10:50"), 0, 0)),
		Currents: currents(t, currentFrom(clock("10:50"), 90, 1.4), currentFrom(clock("11:10"), 90, 0),
			currentFrom(clock("11:30"), 270, 1.1)),
	}
	d := datumAt(t, c, clock("12:10"))
	near(t, "net east, NM", d.Shift.EastM/nav.MetresPerNM, -0.27, 0.005)
	near(t, "net north, NM", d.Shift.NorthM/nav.MetresPerNM, 0, 1e-9)
	near(t, "the first stream kept is wrong by, NM", 1.4*80/60-d.Shift.EastM/nav.MetresPerNM, 2.13, 0.006)
}

// Scenario 25: a lifebuoy dropped at the mark measures the drift; the model's
// current stays listed beside it.
func TestScenario25DriftMeasured(t *testing.T) {
	mark := position(t, "50N 001W")
	dropped := nav.Fix{At: clock("10:00"), Position: mark}
	found := nav.Fix{At: clock("10:32"), Position: mark.Shift(nav.Along(250, 0.6*nav.MetresPerNM))}
	m, err := weather.DriftOf(dropped, found)
	if err != nil {
		t.Fatal(err)
	}
	near(t, "measured, kn", m.Velocity.SpeedKn(), 1.1, 0.05)
	near(t, "measured towards", float64(m.Velocity.Direction().Or(-1)), 250, 0.01)

	model := currentFrom(clock("10:00"), 240, 0.8)
	model.Source = weather.Tables
	h := currents(t, model)
	if err := h.Add(m.Sample(dropped.At, found.At.Sub(dropped.At), weather.Measured, "lifebuoy")); err != nil {
		t.Fatal(err)
	}
	if got := h.Samples(); len(got) != 2 || got[0].Velocity != model.Velocity {
		t.Errorf("samples = %v, want the model's and the measured one", got)
	}
	c := drift.Case{
		Start: drift.Start{Position: mark}, FellFrom: clock("10:00"), FellTo: clock("10:00"), Class: class(t, "person"),
		Winds: winds(t, windFrom(clock("10:00"), 0, 0)), Currents: h,
	}
	d := datumAt(t, c, clock("10:32"))
	near(t, "datum from where the buoy was found, m", d.Shift.Sub(nav.Along(250, 0.6*nav.MetresPerNM)).RangeM(), 0, 0.1)
}

// Scenario 28: missing since the watch changed: a corridor, no single point.
func TestScenario28MissingSinceWatchChange(t *testing.T) {
	begin := position(t, "50N 001W")
	var fixes []nav.Fix
	for m := 0; m <= 255; m += 5 {
		at := clock("00:00").Add(time.Duration(m) * time.Minute)
		fixes = append(fixes, nav.Fix{At: at, Position: begin.Shift(nav.Along(270, float64(m)/60*6*nav.MetresPerNM))})
	}
	c := drift.Case{
		Start: drift.Start{Path: nav.NewTrack(fixes)}, FellFrom: clock("00:00"), FellTo: clock("04:00"), Class: class(t, "person"),
		Winds: winds(t, windFrom(clock("00:00"), 0, 0)), Currents: currents(t, currentFrom(clock("00:00"), 180, 1.2)),
	}
	d := datumAt(t, c, clock("04:15"))
	if d.Point.IsSet() {
		t.Error("a corridor shown as one point")
	}
	first, last := d.Ends()
	far, ok := first.Get()
	nearEnd, ok2 := last.Get()
	if !ok || !ok2 {
		t.Fatal("no ends")
	}
	now := fixes[len(fixes)-1].Position
	// The fixes were laid out in one plane: 0.001 NM in 25 is its curvature.
	near(t, "stretch of track, NM", nav.Inverse(far.From, nearEnd.From).RangeM/nav.MetresPerNM, 24, 0.005)
	near(t, "far end astern, NM", nav.Inverse(now, far.From).RangeM/nav.MetresPerNM, 25.5, 0.005)
	near(t, "drift at the far end, NM", far.MovedM/nav.MetresPerNM, 5.1, 0.05)
	near(t, "drift at the near end, NM", nearEnd.MovedM/nav.MetresPerNM, 0.3, 0.005)
	if !(far.ProbableErrorM > nearEnd.ProbableErrorM) {
		t.Error("the far end is older and must be less certain")
	}
}
