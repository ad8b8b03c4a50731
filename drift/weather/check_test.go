package weather

import (
	"encoding/csv"
	"math"
	"os"
	"strconv"
	"strings"
	"testing"

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

func near(t testing.TB, what string, got, want, tol float64) {
	t.Helper()
	if !(math.Abs(got-want) <= tol) {
		t.Errorf("%s = %v, want %v ± %v", what, got, want, tol)
	}
}

func number(t testing.TB, s string) float64 {
	t.Helper()
	v, err := strconv.ParseFloat(s, 64)
	if err != nil {
		t.Fatal(err)
	}
	return v
}

// expected is the column of a check value that says what to expect, so that
// the figures below can be seen to be those of the file.
func expected(t testing.TB, id string) string {
	t.Helper()
	for _, row := range table(t, "check-values.csv") {
		if row[0] == id {
			return row[3]
		}
	}
	t.Fatalf("no check value %s", id)
	return ""
}

// figures are the numbers in a text, in order.
func figures(s string) []float64 {
	var out []float64
	for _, f := range strings.FieldsFunc(s, func(r rune) bool { return !strings.ContainsRune("0123456789.-", r) }) {
		if v, err := strconv.ParseFloat(f, 64); err == nil {
			out = append(out, v)
		}
	}
	return out
}

// The tolerance of a check value is half of the last digit its row prints.
func TestCheckValues(t *testing.T) {
	underway := Underway{CogTrue: 78, SogKn: 6.5, Heading: 90, StwKn: 6}
	t.Run("CU1", func(t *testing.T) {
		want, m := figures(expected(t, "CU1")), mustSet(t, underway)
		near(t, "set", float64(m.Velocity.Direction().Or(-1)), want[0], 0.005)
		near(t, "drift", m.Velocity.SpeedKn(), want[1], 0.00005)
	})
	t.Run("CU2", func(t *testing.T) {
		u := underway
		u.LeewayDeg = 4
		want, m := figures(expected(t, "CU2")), mustSet(t, u)
		near(t, "set", float64(m.Velocity.Direction().Or(-1)), want[0], 0.005)
		near(t, "drift", m.Velocity.SpeedKn(), want[1], 0.00005)
	})
	t.Run("CU3", func(t *testing.T) {
		u := underway
		u.SogSDKn, u.CogSDDeg, u.StwSDKn, u.HeadingSDDeg = nav.Some(0.1), nav.Some(1.0), nav.Some(0.3), nav.Some(3.0)
		want, cov := figures(expected(t, "CU3")), mustSet(t, u).Cov
		kn2 := nav.MsPerKn * nav.MsPerKn
		near(t, "var E", cov.EE/kn2, want[0], 0.000005)
		near(t, "var N", cov.NN/kn2, want[1], 0.000005)
		near(t, "cov", cov.EN/kn2, want[2], 0.000005)
		if usual := mustSet(t, underway).Cov; usual != cov {
			t.Errorf("usual covariance %v, want %v", usual, cov)
		}
	})
	t.Run("CU4", func(t *testing.T) {
		v, err := Stream{Set: 40, NeapKn: 0.8, SpringKn: 1.7}.Velocity(Tide{RangeM: 4.1, NeapRangeM: 2.4, SpringRangeM: 5.0})
		if err != nil {
			t.Fatal(err)
		}
		near(t, "rate", v.SpeedKn(), figures(expected(t, "CU4"))[0], 0.00005)
		near(t, "set", float64(v.Direction().Or(-1)), 40, 1e-9)
	})
	for id, lat := range map[string]float64{"CU5": 50, "CU6": -35} {
		t.Run(id, func(t *testing.T) {
			v, _ := WindDriven(nav.BlowingFrom(270, 20), lat)
			want := figures(expected(t, id))
			near(t, "speed", v.SpeedKn(), want[0], 0.005)
			near(t, "towards", float64(v.Direction().Or(-1)), want[1], 0.5)
		})
	}
	t.Run("CU7", func(t *testing.T) {
		v, ok := Ekman(nav.Velocity{EastMs: 10}, 45).Get()
		if !ok {
			t.Fatal("absent")
		}
		near(t, "speed", v.SpeedMs(), figures(expected(t, "CU7"))[0], 0.00005)
		near(t, "towards", float64(v.Direction().Or(-1)), 90+45, 1e-9)
	})
	t.Run("WH1", func(t *testing.T) {
		f, err := LogFactor(15)
		near(t, "wind", 20*f, figures(expected(t, "WH1"))[0], 0.005)
		if err != nil {
			t.Error(err)
		}
	})
	t.Run("WH2", func(t *testing.T) {
		f, err := PowerFactor(15)
		near(t, "wind", 20*f, figures(expected(t, "WH2"))[0], 0.005)
		if err != nil {
			t.Error(err)
		}
	})
	t.Run("BF2", func(t *testing.T) { near(t, "force 8", Force(8).Ms(), figures(expected(t, "BF2"))[0], 0.005) })
}

func mustSet(t *testing.T, u Underway) Measurement {
	t.Helper()
	m, err := SetAndDrift(u)
	if err != nil {
		t.Fatal(err)
	}
	return m
}

// wind-height.csv: both laws at eleven heights, to the four digits printed.
func TestHeightTable(t *testing.T) {
	for _, row := range table(t, "wind-height.csv") {
		z := number(t, row[0])
		log, err := LogFactor(z)
		if err != nil {
			t.Fatal(err)
		}
		power, err := PowerFactor(z)
		if err != nil {
			t.Fatal(err)
		}
		near(t, "log law at "+row[0], log, number(t, row[1]), 0.00005)
		near(t, "power law at "+row[0], power, number(t, row[2]), 0.00005)
	}
	for _, z := range []float64{0, -3, 0.5, 200, math.NaN(), math.Inf(1)} {
		if _, err := LogFactor(z); err == nil {
			t.Errorf("LogFactor(%v) is taken", z)
		}
		if _, err := PowerFactor(z); err == nil {
			t.Errorf("PowerFactor(%v) is taken", z)
		}
	}
}

// beaufort.csv: the scale as gathered from its sources, against the one shown.
func TestBeaufortTable(t *testing.T) {
	rows, source, err := Beaufort()
	if err != nil || source == "" {
		t.Fatalf("Beaufort: %q, %v", source, err)
	}
	want := table(t, "beaufort.csv")
	if len(rows) != 13 || len(want) != 13 {
		t.Fatalf("%d and %d rows, want 13", len(rows), len(want))
	}
	for i, row := range want {
		r := rows[i]
		if r.Name != row[1] || int(r.Force) != i {
			t.Errorf("force %d = %v %q, want %q", i, r.Force, r.Name, row[1])
		}
		near(t, "mean of "+row[1], r.Force.Ms(), number(t, row[7]), 0.005)
		kn, ms := figures(strings.ReplaceAll(row[2], "-", " ")), figures(strings.ReplaceAll(row[3], "-", " "))
		if i > 0 { // force 0 is "<1"
			near(t, "knots of "+row[1], r.MinKn, kn[0], 0)
			near(t, "m/s of "+row[1], r.MinMs, ms[0], 0)
		}
		if i > 0 && i < 12 {
			near(t, "most knots of "+row[1], r.MaxKn.Or(-1), kn[1], 0)
			near(t, "most m/s of "+row[1], r.MaxMs.Or(-1), ms[1], 0)
			near(t, "waves of "+row[1], r.WaveM.Or(-1), number(t, row[4]), 0)
			near(t, "highest waves of "+row[1], r.MaxWaveM.Or(-1), number(t, row[5]), 0)
		}
		// Both ways: each limit, and the mean, is of its own force.
		for _, v := range []float64{r.MinMs, r.MaxMs.Or(40), r.Force.Ms()} {
			if got, ok := ForceOf(v).Get(); !ok || int(got) != i {
				t.Errorf("ForceOf(%v) = %v, want %d", v, got, i)
			}
		}
	}
	for _, v := range []float64{-1, math.NaN()} {
		if _, ok := ForceOf(v).Get(); ok {
			t.Errorf("ForceOf(%v) is present", v)
		}
	}
	if got := ForceOf(300).Or(-1); got != 12 {
		t.Errorf("ForceOf(300) = %d, want 12", got)
	}
}
