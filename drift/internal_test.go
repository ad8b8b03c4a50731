package drift

import (
	"math"
	"testing"
)

// The normal numbers are drawn from straight lines through exact quantiles.
// There are too many to add up; each cell's moments follow from its line: with z
// even over [a, b], E z² = (a² + ab + b²)/3.
func TestNormalMoments(t *testing.T) {
	table := normals()
	var mass, second, fourth float64
	for i := range halfTable - segments {
		lo := math.Float64frombits(uint64(firstCell+i) << cellShift)
		hi := math.Float64frombits(uint64(firstCell+i+1) << cellShift)
		a, b := table[i].c0+table[i].c1*lo, table[i].c0+table[i].c1*hi
		p := (hi - lo) * 0x1p-31 // both halves
		mass += p
		second += p * (a*a + a*b + b*b) / 3
		fourth += p * (a*a*a*a + a*a*a*b + a*a*b*b + a*b*b*b + b*b*b*b) / 5
	}
	// The cells begin at w = 1 of 2^31: the rest is 4.7e-10.
	if math.Abs(mass-1) > 1e-9 {
		t.Errorf("mass = %v, want 1", mass)
	}
	if math.Abs(second-1) > 1e-5 {
		t.Errorf("variance = %v, want 1", second)
	}
	if math.Abs(fourth-3) > 1e-3 {
		t.Errorf("fourth moment = %v, want 3", fourth)
	}
}

// Quantiles of the normal distribution from a table (NIST/SEMATECH e-Handbook,
// section 1.3.6.7.1: 0.97500 at 1.96, 0.99865 at 3.00, 0.50000 at 0), to the five
// figures printed there.
func TestNormalQuantiles(t *testing.T) {
	table := normals()
	for _, c := range []struct{ z, cumulative float64 }{{0, 0.5}, {0.5, 0.69146}, {1, 0.84134}, {1.96, 0.97500}, {3, 0.99865}} {
		u := uint32((1 - c.cumulative) * (1 << 32))
		got := table.normal(min(u, math.MaxInt32))
		density := math.Exp(-c.z*c.z/2) / math.Sqrt(2*math.Pi)
		if tol := 0.5e-5/density + 1e-5; math.Abs(got-c.z) > tol {
			t.Errorf("normal at %v = %v, want %v ± %v", c.cumulative, got, c.z, tol)
		}
	}
	for _, w := range []int32{1, 12345, math.MaxInt32} {
		if up, down := table.normal(uint32(w)), table.normal(uint32(-w)); up != -down || up < 0 {
			t.Errorf("the halves differ: %v, %v", up, down)
		}
	}
	for _, u := range []uint32{0, 1, math.MaxInt32, math.MaxInt32 + 1, math.MaxUint32} {
		if z := table.normal(u); !(math.Abs(z) < 6.3) {
			t.Errorf("normal(%#x) = %v", u, z)
		}
	}
}

// SplitMix64's first numbers from seed 1234567 (the reference program by
// Vigna, prng.di.unimi.it/splitmix64.c; values as widely published).
func TestSplitMix64(t *testing.T) {
	s := stream{1234567}
	for i, want := range []uint64{6457827717110365317, 3203168211198807973, 9817491932198370423} {
		if got := s.next(); got != want {
			t.Errorf("number %d = %d, want %d", i, got, want)
		}
	}
}

// Streams of neighbouring members and seeds must not go together.
func TestStreamsAreApart(t *testing.T) {
	table := normals()
	const n, lag = 20000, 3
	draw := func(seed uint64, member int) []float64 {
		s := stream{mix64(mix64(seed^stafford) + uint64(member)*golden)}
		out := make([]float64, n)
		for i := range out {
			out[i] = s.normal(table)
		}
		return out
	}
	for _, c := range [][2][]float64{{draw(1, 0), draw(1, 1)}, {draw(1, 0), draw(2, 0)}, {draw(7, 9), draw(7, 9)[lag:]}} {
		sum := 0.0
		for i := range c[1] {
			sum += c[0][i] * c[1][i]
		}
		// Five standard deviations of a correlation that is not there.
		if r := sum / n; math.Abs(r) > 5/math.Sqrt(n) {
			t.Errorf("correlation %v", r)
		}
	}
}

// A row filled in from the report is used, without touching code.
func TestFilledInRow(t *testing.T) {
	const head = "# note\nid,...\n"
	classes, err := parseClasses(head + "x,X,Something,1.5,0.1,20,1.1,3.6,6,0.4,0.1,4,-0.5,-0.2,5,2,14,6,A report\n")
	if err != nil || len(classes) != 1 {
		t.Fatal(classes, err)
	}
	c := classes[0]
	k, ok := c.Components.Get()
	if !ok || c.Derived() || c.Source != "A report" || c.WindMaxMs.Or(0) != 14 || c.JibesPerHour != 0.06 {
		t.Errorf("class %+v", c)
	}
	want := Components{Regression{0.011, 0.036, 0.06}, Regression{0.004, 0.001, 0.04}, Regression{-0.005, -0.002, 0.05}}
	for i, pair := range [][2]Regression{{k.Downwind, want.Downwind}, {k.Right, want.Right}, {k.Left, want.Left}} {
		got, w := pair[0], pair[1]
		if math.Abs(got.Slope-w.Slope)+math.Abs(got.OffsetMs-w.OffsetMs)+math.Abs(got.SyxMs-w.SyxMs) > 1e-12 {
			t.Errorf("regression %d = %v, want %v", i, got, w)
		}
	}
	for name, row := range map[string]string{
		"half filled in":          "x,X,Something,1.5,0.1,20,1.1,3.6,,,,,,,,,,,\n",
		"a word":                  "x,X,Something,much,0.1,20,,,,,,,,,,,,,\n",
		"endless":                 "x,X,Something,Inf,0.1,20,,,,,,,,,,,,,\n",
		"columns":                 "x,X,Something,1.5,0.1,20\n",
		"percent as share of one": "x,X,Something,150,0.1,20,,,,,,,,,,,,,\n",
		"twice":                   "x,X,Something,1.5,0.1,20,,,,,,,,,,,,,\nx,X,Something,1.5,0.1,20,,,,,,,,,,,,,\n",
	} {
		if _, err := parseClasses(head + row); err == nil {
			t.Errorf("%s is taken", name)
		}
	}
}

func FuzzParseClasses(f *testing.F) {
	f.Add(leewayCSV)
	f.Add("#\nid\nx,X,S,1.5,0.1,20,1.1,3.6,6,0.4,0.1,4,-0.5,-0.2,5,2,14,6,A\n")
	f.Add("id\n,,,,,,,,,,,,,,,,,,\n")
	f.Fuzz(func(t *testing.T, text string) {
		classes, err := parseClasses(text)
		if err != nil {
			return
		}
		for _, c := range classes {
			if err := c.Validate(); err != nil {
				t.Fatal(err)
			}
			if v := c.SpeedMs(10); !(v >= 0 && v < 10) {
				t.Fatalf("%q makes %v m/s in 10 m/s", c.ID, v)
			}
		}
	})
}

func FuzzParseCold(f *testing.F) {
	f.Add(coldwaterCSV)
	f.Add("#\nwhat\nhalf,5,5,worn,60,60,S\nhalf,10,10,worn,,,S\n")
	f.Fuzz(func(t *testing.T, text string) {
		rows, err := parseCold(text)
		if err != nil {
			return
		}
		for _, c := range []float64{-2, 0, 7.5, 30} {
			spanned(figuresOf(rows, c, FlotationUnknown), "survival", "half")
		}
	})
}
