package effort

import (
	"errors"
	"math"
	"math/rand/v2"
	"testing"

	"pgregory.net/rapid"

	"wakeback/drift/nav"
	"wakeback/search/detect"
)

func near(t testing.TB, what string, got, want, tolerance float64) {
	t.Helper()
	if math.IsNaN(got) || math.Abs(got-want) > tolerance {
		t.Errorf("%s = %v, want %v within %v", what, got, want, tolerance)
	}
}

// A run much longer than the distance abeam is the lateral range law that
// chose the spacing.
func TestLongRunIsTheLateralRangeLaw(t *testing.T) {
	const w = 185.2
	var l Log
	l.Add(Run{From: nav.Offset{NorthM: -1e6}, To: nav.Offset{NorthM: 1e6}, WidthM: w})
	for _, x := range []float64{20, 46.3, 92.6, 185.2, 500} {
		// What is beyond the ends is a/(2·1e12) at each, 3e-9 together.
		near(t, "seen", l.POD(nav.Offset{EastM: x}), detect.InverseCube(x, w), 3e-9)
		near(t, "the other side", l.POD(nav.Offset{EastM: -x}), detect.InverseCube(x, w), 3e-9)
	}
}

// Cutting a run into pieces, or turning everything, changes nothing.
func TestRunsAddUp(t *testing.T) {
	rapid.Check(t, func(rt *rapid.T) {
		f := func(name string) float64 { return rapid.Float64Range(-2000, 2000).Draw(rt, name) }
		from, to, p := nav.Offset{EastM: f("e1"), NorthM: f("n1")}, nav.Offset{EastM: f("e2"), NorthM: f("n2")}, nav.Offset{EastM: f("pe"), NorthM: f("pn")}
		w := rapid.Float64Range(20, 500).Draw(rt, "w")
		cut := rapid.Float64Range(0.01, 0.99).Draw(rt, "cut")
		mid := from.Add(to.Sub(from).Scale(cut))
		whole := Run{from, to, w}.Exposure(p)
		parts := Run{from, mid, w}.Exposure(p) + Run{mid, to, w}.Exposure(p)
		// The cut point is rounded: next to the track x is uncertain by 1e-12 m of
		// closeM, times the largest exposure.
		if math.Abs(whole-parts) > 1e-6*(1+whole) {
			rt.Fatalf("whole %v, parts %v", whole, parts)
		}
		back := Run{to, from, w}.Exposure(p)
		if math.Abs(whole-back) > 1e-6*(1+whole) {
			rt.Fatalf("there %v, back %v", whole, back)
		}
		if whole < 0 {
			rt.Fatalf("exposure %v", whole)
		}
	})
}

// Parallel legs over a large area find what the closed form says.
func TestParallelLegsAgainstTheClosedForm(t *testing.T) {
	for _, coverage := range []float64{0.5, 1, 1.5} {
		const w = 200.0
		spacing := w / coverage
		var l Log
		for leg := -60; leg <= 60; leg++ {
			x := float64(leg) * spacing
			l.Add(Run{nav.Offset{EastM: x, NorthM: -5e4}, nav.Offset{EastM: x, NorthM: 5e4}, w})
		}
		var sum float64
		const steps = 400
		for i := range steps {
			sum += l.POD(nav.Offset{EastM: (float64(i) + 0.5) / steps * spacing})
		}
		// Legs beyond the sixtieth are left out: C²/(2 pi 60).
		near(t, "POD", sum/steps, detect.PODParallel(coverage), coverage*coverage/(2*math.Pi*60)+1e-4)
	}
}

// What is counted from a weaving track is what happens when the law is played
// out: in short steps, each seeing or not by the rate at the distance then.
func TestCountedAgainstPlayedOut(t *testing.T) {
	rng := rand.New(rand.NewPCG(7, 11))
	const w, speed, dt, people = 150.0, 3.0, 1.0, 4000
	places := make([]nav.Offset, people)
	for i := range places {
		places[i] = nav.Offset{EastM: rng.Float64()*1200 - 600, NorthM: rng.Float64()*1200 - 600}
	}
	var l Log
	seen := make([]bool, people)
	// A helm that weaves by 8 degrees on legs of 1200 m, 240 m apart.
	at := nav.Offset{EastM: -480, NorthM: -600}
	base := []float64{0, 90, 180, 90}
	a := w * w / (4 * math.Pi)
	for step := range 2400 {
		course := base[3]
		switch phase := step % 960; {
		case phase < 400:
			course = base[0]
		case phase < 480:
			course = base[1]
		case phase < 880:
			course = base[2]
		}
		course += rng.NormFloat64() * 8
		to := at.Add(nav.Along(nav.True(course), speed*dt))
		l.Add(Run{at, to, w})
		mid := at.Add(to).Scale(0.5)
		for i, p := range places {
			r := math.Max(p.Sub(mid).RangeM(), closeM)
			if !seen[i] && rng.Float64() < -math.Expm1(-a/2*speed*dt/(r*r*r)) {
				seen[i] = true
			}
		}
		at = to
	}
	found := 0.0
	for _, s := range seen {
		if s {
			found++
		}
	}
	pod := l.PODOver(places)
	// Three standard errors of a count of so many, and 0.005 for taking the
	// distance at the middle of steps of 3 m.
	near(t, "POD", found/people, pod, 3*math.Sqrt(pod*(1-pod)/people)+0.005)
	if pod < 0.1 || pod > 0.95 {
		t.Errorf("POD %v: the case says nothing", pod)
	}
}

// Not found: what was looked at well counts less afterwards, what was not
// looked at counts as before (0.6 and 0.4, POD 0.8 in the first: 0.48 is gone).
func TestWeights(t *testing.T) {
	const w = 100.0
	x := math.Sqrt(w * w / (4 * math.Pi) / -math.Log(1-0.8)) // where POD is 0.8
	var l Log
	l.Add(Run{nav.Offset{NorthM: -1e7}, nav.Offset{NorthM: 1e7}, w})
	places := []nav.Offset{{EastM: x}, {EastM: 1e9}}
	left := l.Weights(places, []float64{0.6, 0.4})
	near(t, "searched", left[0], 0.12, 1e-9)
	near(t, "not searched", left[1], 0.4, 1e-9)
	near(t, "posterior", left[0]/(left[0]+left[1]), 0.230769, 1e-6)
}

// Twenty legs finished at an assumed sweep width of 0.1 nm and a spacing of
// 0.175 nm: coverage 0.57, and 0.44 under random search.
func TestScenario21CoverageHonest(t *testing.T) {
	c := detect.Coverage(0.1, 0.175)
	near(t, "coverage", c, 0.57, 0.005)
	near(t, "chance under random search", detect.PODRandom(c), 0.44, 0.005)
}

// The helm left leg 4 after 40 per cent: only that counts.
func TestScenario22LegsNotRun(t *testing.T) {
	const w, length = 100.0, 1000.0
	var l Log
	l.Add(Run{nav.Offset{}, nav.Offset{NorthM: 0.4 * length}, w})
	near(t, "swept", l.SweptM2(), 0.4*length*w, 1e-9)
	run, rest := l.POD(nav.Offset{EastM: 30, NorthM: 200}), l.POD(nav.Offset{EastM: 30, NorthM: 900})
	if run < 0.5 || rest > 0.05 {
		t.Errorf("beside the part run %v, beside the rest %v", run, rest)
	}
}

func TestGrid(t *testing.T) {
	if _, err := NewGrid(nav.Offset{}, 0, 3, 3); !errors.Is(err, ErrGrid) {
		t.Errorf("err = %v", err)
	}
	g, err := NewGrid(nav.Offset{EastM: -500, NorthM: -500}, 50, 20, 20)
	if err != nil {
		t.Fatal(err)
	}
	r := Run{nav.Offset{NorthM: -400}, nav.Offset{NorthM: 400}, 120}
	g.Add(r)
	var l Log
	l.Add(r)
	near(t, "cell", g.POD(12, 9), l.POD(nav.Offset{EastM: 125, NorthM: -25}), 1e-12)
	if m := g.MeanPOD(); m <= 0 || m >= 1 {
		t.Errorf("mean %v", m)
	}
}
