package detect

import (
	"encoding/csv"
	"errors"
	"math"
	"os"
	"strconv"
	"strings"
	"testing"

	"pgregory.net/rapid"
)

func near(t testing.TB, what string, got, want, tolerance float64) {
	t.Helper()
	if math.IsNaN(got) || math.Abs(got-want) > tolerance {
		t.Errorf("%s = %v, want %v within %v", what, got, want, tolerance)
	}
}

func numbers(t *testing.T, name string) [][]float64 {
	t.Helper()
	text, err := os.ReadFile("testdata/" + name)
	if err != nil {
		t.Fatal(err)
	}
	r := csv.NewReader(strings.NewReader(string(text)))
	r.Comment = '#'
	rows, err := r.ReadAll()
	if err != nil {
		t.Fatal(err)
	}
	var out [][]float64
	for _, row := range rows[1:] {
		var n []float64
		for _, cell := range row {
			v, err := strconv.ParseFloat(cell, 64)
			if err != nil {
				t.Fatal(err)
			}
			n = append(n, v)
		}
		out = append(out, n)
	}
	return out
}

func TestPODAgainstTable(t *testing.T) {
	for _, r := range numbers(t, "pod.csv") {
		near(t, "parallel", PODParallel(r[0]), r[2], 0.00005+1e-12) // four decimals
		near(t, "random", PODRandom(r[0]), r[3], 0.00005+1e-12)
	}
	near(t, "parallel at 1", PODParallel(1), 0.789909, 1e-6)
	near(t, "random at 1", PODRandom(1), 0.632121, 1e-6)
}

func TestLateralRangeAgainstTable(t *testing.T) {
	for _, r := range numbers(t, "lateral.csv") {
		near(t, "lateral range", InverseCube(r[0], 1), r[1], 0.00005+1e-12)
	}
	near(t, "W/2", InverseCube(0.5, 1), 0.272623, 1e-6)
}

// The area under the lateral range curve is the sweep width: that is what the
// word means. Beyond 1000 W the tail is W²/(2 pi 1000) on both sides.
func TestSweepWidthIsTheAreaUnderTheCurve(t *testing.T) {
	for _, w := range []float64{0.1, 0.3, 2} {
		const step = 1e-3
		var area float64
		for x := -1000 + step/2; x < 1000; x += step {
			area += InverseCube(x*w, w) * step * w
		}
		near(t, "area", area, w, 5e-4*w)
	}
}

// Frost, note of 1998 on the use of POD: goal 0.80, 0.20 reached, 0.75 needed.
func TestPODNeeded(t *testing.T) {
	near(t, "needed", PODNeeded(0.8, 0.2), 0.75, 1e-12)
	near(t, "twice", PODCumulative(0.469116, 0.469116), 0.718162, 1e-6)
	if got := PODNeeded(0.5, 0.6); got != 0 {
		t.Errorf("needed = %v with the goal reached", got)
	}
}

// Training slides of the US Coast Guard Auxiliary, SAR chapter 4; the product
// of the third is a worked example with factors of JP 3-50.
func TestSweepWidths(t *testing.T) {
	boat, err := SmallBoat()
	if err != nil {
		t.Fatal(err)
	}
	ship, err := MerchantShip()
	if err != nil {
		t.Fatal(err)
	}
	tests := map[string]struct {
		table Table
		c     Conditions
		want  float64
	}{
		"person, 10 nm":               {boat, Conditions{Object: PersonInWater, VisibilityNM: 10}, 0.3},
		"raft of 4, 5 nm":             {boat, Conditions{Object: "raft 4 persons", VisibilityNM: 5}, 2.2},
		"person, 18 kn, tired":        {boat, Conditions{Object: PersonInWater, VisibilityNM: 10, WindKn: 18, Tired: true}, 0.135},
		"person, 30 kn":               {boat, Conditions{Object: PersonInWater, VisibilityNM: 10, WindKn: 30}, 0.075},
		"sea is worse than wind":      {boat, Conditions{Object: PersonInWater, VisibilityNM: 10, WindKn: 16, SeaM: 1.5}, 0.075},
		"large boat, 30 kn":           {boat, Conditions{Object: "sail boat 40 ft", VisibilityNM: 10, WindKn: 30}, 5.94},
		"between columns":             {boat, Conditions{Object: "power boat under 15 ft", VisibilityNM: 2}, 0.6},
		"beyond the last column":      {boat, Conditions{Object: PersonInWater, VisibilityNM: 30}, 0.3},
		"merchant ship, from memory":  {ship, Conditions{Object: PersonInWater, VisibilityNM: 10}, 0.6},
		"raft counts as small":        {boat, Conditions{Object: "raft 1 person", VisibilityNM: 10, WindKn: 20}, 1.15},
		"liferaft seen from the ship": {ship, Conditions{Object: "liferaft 4 persons", VisibilityNM: 10, WindKn: 20}, 2.1},
	}
	for name, tt := range tests {
		w, err := tt.table.Corrected(tt.c)
		if err != nil {
			t.Errorf("%s: %v", name, err)
			continue
		}
		near(t, name, w.NM, tt.want, 1e-9)
		if w.Source == "" {
			t.Errorf("%s: no source", name)
		}
	}
}

func TestNoFigureRatherThanAWrongOne(t *testing.T) {
	boat, _ := SmallBoat()
	if _, err := boat.Corrected(Conditions{Object: PersonInWater, VisibilityNM: 5, Night: true}); !errors.Is(err, ErrNight) {
		t.Errorf("night: %v", err)
	}
	if _, err := boat.Corrected(Conditions{Object: PersonInWater, VisibilityNM: 0.5}); !errors.Is(err, ErrVisibility) {
		t.Errorf("fog: %v", err)
	}
	if _, err := boat.Corrected(Conditions{Object: PersonInWater, VisibilityNM: math.NaN()}); !errors.Is(err, ErrVisibility) {
		t.Errorf("no number: %v", err)
	}
	if _, err := boat.Corrected(Conditions{Object: "whale", VisibilityNM: 5}); !errors.Is(err, ErrObject) || !strings.Contains(err.Error(), PersonInWater) {
		t.Errorf("object: %v", err)
	}
	if _, err := boat.Corrected(Conditions{Object: PersonInWater, VisibilityNM: 5, WindKn: -1}); err == nil || !strings.Contains(err.Error(), "wind") {
		t.Errorf("wind: %v", err)
	}
}

// Parallel legs over a wide strip, each seeing by the lateral range law and
// independently, detect what the closed form says.
func TestPODIsTheLawAveraged(t *testing.T) {
	rapid.Check(t, func(rt *rapid.T) {
		c := rapid.Float64Range(0.2, 2.5).Draw(rt, "coverage")
		const w, legs, steps = 0.3, 400, 200
		spacing := w / c
		var sum float64
		for i := range steps {
			x := (float64(i) + 0.5) / steps * spacing
			missed := 1.0
			for leg := -legs; leg <= legs; leg++ {
				missed *= 1 - InverseCube(x-float64(leg)*spacing, w)
			}
			sum += 1 - missed
		}
		// 400 legs each side leave out at most C²/(2 pi 400) of exposure, and the
		// midpoint rule over 200 steps less than 1e-4.
		if got := sum / steps; math.Abs(got-PODParallel(c)) > c*c/(2*math.Pi*legs)+1e-4 {
			rt.Fatalf("coverage %v: averaged %v, closed form %v", c, got, PODParallel(c))
		}
	})
}
