package drift_test

import (
	"encoding/csv"
	"math"
	"os"
	"strconv"
	"testing"
	"time"

	"wakeback/drift"
	"wakeback/drift/nav"
	"wakeback/drift/weather"
)

// steady is a wind or current that stays the same, with its error, all through:
// a table's two equal ends.
func steady(at time.Time, span time.Duration, v nav.Velocity, sdMs float64) []weather.Sample {
	a := weather.Sample{From: at.Add(-time.Hour), Velocity: v, SDMs: nav.Some(sdMs), Source: weather.Tables, Name: "fixture"}
	b := a
	b.From = at.Add(span)
	return []weather.Sample{a, b}
}

func cloudAt(t testing.TB, c drift.Case, o drift.Options, at time.Time) *drift.Cloud {
	t.Helper()
	cl, err := drift.NewCloud(c, o)
	if err != nil {
		t.Fatal(err)
	}
	if err := cl.Advance(at); err != nil {
		t.Fatal(err)
	}
	return cl
}

// closedForm reads the values that stand in closed form.
func closedForm(t testing.TB) map[string]float64 {
	t.Helper()
	f, err := os.Open("testdata/mc-closed-form.csv")
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
	values := make(map[string]float64)
	for _, row := range rows[1:] {
		if v, err := strconv.ParseFloat(row[1], 64); err == nil {
			values[row[0]] = v
		}
	}
	return values
}

func value(t testing.TB, values map[string]float64, name string) float64 {
	t.Helper()
	v, ok := values[name]
	if !ok {
		t.Fatalf("no closed form %q", name)
	}
	return v
}

// mean and sd gather a figure over many seeds.
type gather struct{ n, sum, squares float64 }

func (g *gather) add(v float64) { g.n++; g.sum += v; g.squares += v * v }
func (g gather) mean() float64  { return g.sum / g.n }

// seeds is over how many clouds the closed forms are compared, each of perSeed
// members: 40,000 in all.
const (
	seeds   = 20
	perSeed = 2000
)

// pooled is the mean and covariance of many clouds of one case together.
func pooled(t *testing.T, c drift.Case, m drift.Model, at time.Time) (meanE, meanN, sdE, sdN, corr float64) {
	t.Helper()
	var e, n gather
	cross := 0.0
	for seed := range uint64(seeds) {
		cl := cloudAt(t, c, drift.Options{Members: perSeed, Seed: seed, Model: m}, at)
		east, north := cl.Points()
		for i := range east {
			e.add(east[i])
			n.add(north[i])
			cross += east[i] * north[i]
		}
	}
	meanE, meanN = e.mean(), n.mean()
	sdE = math.Sqrt(e.squares/e.n - meanE*meanE)
	sdN = math.Sqrt(n.squares/n.n - meanN*meanN)
	return meanE, meanN, sdE, sdN, (cross/e.n - meanE*meanN) / (sdE * sdN)
}

// Sampling tolerances for members in all: four standard errors, so that one
// figure in 16,000 fails by chance, and the seeds are fixed.
func meanTol(sd float64) float64 { return 4 * sd / math.Sqrt(seeds*perSeed) }
func sdTol(sd float64) float64   { return 4 * sd / math.Sqrt(2*seeds*perSeed) }

func openWater(t testing.TB, class drift.Class, wind, current nav.Velocity, windSD, currentSD float64) drift.Case {
	at := clock("10:00")
	return drift.Case{
		Start: drift.Start{Position: position(t, "50N 001W"), Error95M: nav.Some(0.0)}, FellFrom: at, FellTo: at, Class: class,
		Winds: winds(t, steady(at, 48*time.Hour, wind, windSD)...), Currents: currents(t, steady(at, 48*time.Hour, current, currentSD)...),
	}
}

// Case A of the closed forms: downwind and crosswind regressions in a steady
// wind, a start of 100 m, jibing.
func TestCaseA(t *testing.T) {
	v := closedForm(t)
	k := drift.Components{
		Downwind: drift.Regression{Slope: 0.011, OffsetMs: 0.036, SyxMs: 0.06},
		Right:    drift.Regression{Slope: 0.004, SyxMs: 0.04},
		Left:     drift.Regression{Slope: -0.004, SyxMs: 0.04},
	}
	c := openWater(t, drift.Class{ID: "a", Components: nav.Some(k), JibesPerHour: 0.04}, nav.BlowingFrom(180, 10/nav.MsPerKn), nav.Velocity{}, 0, 0)
	c.Start.Error95M = nav.Some(100 * drift.Radius95)
	meanE, meanN, sdE, sdN, corr := pooled(t, c, drift.Model{}, clock("16:00"))
	down, across := value(t, v, "case A SD downwind"), value(t, v, "case A SD crosswind, continuous")
	near(t, "mean downwind", meanN, value(t, v, "case A mean downwind"), meanTol(down))
	near(t, "mean crosswind", meanE, 0, meanTol(across))
	near(t, "SD downwind", sdN, down, sdTol(down))
	near(t, "SD crosswind", sdE, across, sdTol(across))
	near(t, "correlation", corr, 0, 4/math.Sqrt(seeds*perSeed))
}

// Without jibing the crosswind section has two humps, half of the members in
// each.
func TestSidesSplitEvenly(t *testing.T) {
	k := drift.Components{
		Downwind: drift.Regression{Slope: 0.011},
		Right:    drift.Regression{Slope: 0.004},
		Left:     drift.Regression{Slope: -0.004},
	}
	c := openWater(t, drift.Class{ID: "b", Components: nav.Some(k)}, nav.BlowingFrom(180, 20), nav.Velocity{}, 0, 0)
	cl := cloudAt(t, c, drift.Options{Members: 10_000, Seed: 3}, clock("12:00"))
	east, _ := cl.Points()
	right := 0
	for _, x := range east {
		near(t, "side", math.Abs(x), 0.004*20*nav.MsPerKn*7200, 1e-6)
		if x > 0 {
			right++
		}
	}
	// Three standard deviations of a fair coin.
	near(t, "to the right", float64(right), 5000, 3*math.Sqrt(10_000)/2)
}

// The errors of the current, against the closed forms of random flight and of
// a constant bias.
func TestCurrentErrors(t *testing.T) {
	v := closedForm(t)
	none := drift.Class{ID: "none"}
	for _, c := range []struct {
		name  string
		hours int
		m     drift.Model
	}{
		{"random flight SD, sigma=0.25 m/s, tau=3600 s, T=3600 s", 1, drift.Model{Persisting: nav.Some(0.0), Correlation: time.Hour}},
		{"random flight SD, sigma=0.25 m/s, tau=3600 s, T=7200 s", 2, drift.Model{Persisting: nav.Some(0.0), Correlation: time.Hour}},
		{"random flight SD, sigma=0.25 m/s, tau=3600 s, T=21600 s", 6, drift.Model{Persisting: nav.Some(0.0), Correlation: time.Hour}},
		{"random flight SD, sigma=0.25 m/s, tau=21600 s, T=3600 s", 1, drift.Model{Persisting: nav.Some(0.0), Correlation: 6 * time.Hour}},
		{"random flight SD, sigma=0.25 m/s, tau=21600 s, T=21600 s", 6, drift.Model{Persisting: nav.Some(0.0), Correlation: 6 * time.Hour}},
		{"constant bias SD, sigma=0.25 m/s, T=7200 s", 2, drift.Model{Persisting: nav.Some(1.0)}},
		{"constant bias SD, sigma=0.25 m/s, T=21600 s", 6, drift.Model{Persisting: nav.Some(1.0)}},
	} {
		t.Run(c.name, func(t *testing.T) {
			want := value(t, v, c.name)
			fall := openWater(t, none, nav.Velocity{}, nav.Towards(100, 1.2), 0, 0.25)
			at := fall.FellFrom.Add(time.Duration(c.hours) * time.Hour)
			meanE, meanN, sdE, sdN, corr := pooled(t, fall, c.m, at)
			shift := nav.Towards(100, 1.2).For(at.Sub(fall.FellFrom))
			near(t, "mean east", meanE, shift.EastM, meanTol(want))
			near(t, "mean north", meanN, shift.NorthM, meanTol(want))
			// Steps of a minute against continuous time: (dt/tau)²/12 is 2e-5 of
			// the variance at a correlation time of an hour.
			near(t, "SD east", sdE, want, sdTol(want)+2e-5*want)
			near(t, "SD north", sdN, want, sdTol(want)+2e-5*want)
			near(t, "correlation", corr, 0, 4/math.Sqrt(seeds*perSeed))
		})
	}
}

// A random flight with a correlation time of a step of 900 s draws nearly anew
// each step: the random walk of the closed forms, which depends on the step.
func TestRandomWalkLimit(t *testing.T) {
	want := value(t, closedForm(t), "random walk SD, sigma=0.25 m/s, dt=900 s, T=21600 s")
	fall := openWater(t, drift.Class{ID: "none"}, nav.Velocity{}, nav.Velocity{}, 0, 0.25)
	m := drift.Model{Persisting: nav.Some(0.0), Correlation: 60 * time.Second, Step: 15 * time.Minute}
	_, _, sdE, sdN, _ := pooled(t, fall, m, clock("16:00"))
	// Steps then hold exp(-15) = 3e-7 of the one before.
	near(t, "SD east", sdE, want, sdTol(want))
	near(t, "SD north", sdN, want, sdTol(want))
}

// The error of the wind moves a member by the slope's share of it: exact where
// leeway has no offset, no divergence and no spread.
func TestWindErrors(t *testing.T) {
	c := drift.Class{ID: "w", Components: nav.Some(drift.Components{Downwind: drift.Regression{Slope: 0.03}})}
	fall := openWater(t, c, nav.BlowingFrom(270, 20), nav.Velocity{}, 2.6, 0)
	m := drift.Model{Persisting: nav.Some(0.5), Correlation: 2 * time.Hour}
	_, _, sdE, sdN, _ := pooled(t, fall, m, clock("13:00"))
	T, tau := 10800.0, 7200.0
	flight := 2 * tau * (T - tau*(1-math.Exp(-T/tau)))
	want := 0.03 * 2.6 * math.Sqrt(0.5*T*T+0.5*flight)
	near(t, "SD east", sdE, want, sdTol(want)+2e-5*want)
	near(t, "SD north", sdN, want, sdTol(want)+2e-5*want)
}

// The manual's datum and the cloud must agree: the means by what divergence
// takes from the way downwind, the total error where the errors persist.
func TestCloudAgreesWithManual(t *testing.T) {
	person := class(t, "person")
	fall := openWater(t, person, nav.BlowingFrom(240, 15), nav.Towards(100, 1.2), 0, 0.131)
	fall.Start.Error95M = nav.Some(100.0)
	at := clock("12:00")
	d := datumAt(t, fall, at)
	meanE, meanN, sdE, sdN, _ := pooled(t, fall, drift.Model{Persisting: nav.Some(1.0)}, at)
	leeway := d.Leeway.Downwind.For(2 * time.Hour)
	// sin 30° / 30° in radians: the mean of the cosine within the divergence.
	short := leeway.Scale(1 - 0.5/(math.Pi/6))
	want := d.Shift.Sub(short)
	near(t, "mean east", meanE, want.EastM, meanTol(sdE))
	near(t, "mean north", meanN, want.NorthM, meanTol(sdN))
	// The manual takes the spread of leeway for the same in all directions, the
	// cloud has it downwind and the divergence across.
	l := leeway.RangeM()
	start, current := 100/drift.Radius95, 0.131*7200
	k := 0.5 / (math.Pi / 6)
	kc2 := 0.5 - math.Sin(math.Pi/3)/(4*math.Pi/6)
	downVar := l * l * (1.09*(1-kc2) - k*k)
	acrossVar := l * l * 1.09 * kc2
	both := 2*start*start + 2*current*current + downVar + acrossVar
	near(t, "root of the total variance", math.Hypot(sdE, sdN), math.Sqrt(both), sdTol(math.Sqrt(both)))
	manual := d.TotalProbableErrorM / drift.Radius50
	near(t, "the manual's error of one axis", manual, math.Sqrt(start*start+current*current+sq(0.3*l)), 1e-6*manual)
}

func sq(x float64) float64 { return x * x }
