package pattern

import (
	"encoding/csv"
	"errors"
	"math"
	"os"
	"strconv"
	"strings"
	"testing"
	"time"

	"pgregory.net/rapid"

	"wakeback/drift/nav"
)

var begin = time.Date(2026, 6, 1, 2, 0, 0, 0, time.UTC)

func near(t testing.TB, what string, got, want, tolerance float64) {
	t.Helper()
	if math.IsNaN(got) || math.Abs(got-want) > tolerance {
		t.Errorf("%s = %v, want %v within %v", what, got, want, tolerance)
	}
}

// table reads a table of testdata: rows of numbers by column name.
func table(t *testing.T, name string) []map[string]float64 {
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
	var out []map[string]float64
	for _, row := range rows[1:] {
		m := map[string]float64{}
		for i, cell := range row {
			if v, err := strconv.ParseFloat(cell, 64); err == nil {
				m[rows[0][i]] = v
			}
		}
		out = append(out, m)
	}
	return out
}

func TestSquareAgainstTable(t *testing.T) {
	const d = 185.2
	rows := table(t, "square.csv")
	for _, first := range []nav.TrueDeg{0, 77, 350} {
		legs, err := Square(first, d, len(rows), Right)
		if err != nil {
			t.Fatal(err)
		}
		var run float64
		for i, row := range rows {
			l := legs[i]
			run += l.LengthM
			near(t, "length", l.LengthM, row["length_in_d"]*d, 1e-9)
			near(t, "course", l.Course.Minus(first.Add(row["heading_deg_relative_to_first"])), 0, 1e-9)
			near(t, "run", run, row["cumulative_length_in_d"]*d, 1e-9)
			// Rounding of twenty sums of up to 1e4 m: well under a micrometre.
			want := turned(row["east_in_d"]*d, row["north_in_d"]*d, first)
			near(t, "east", l.To.EastM, want.EastM, 1e-6)
			near(t, "north", l.To.NorthM, want.NorthM, 1e-6)
		}
	}
}

func turned(east, north float64, by nav.TrueDeg) nav.Offset {
	s, c := math.Sincos(float64(by) * math.Pi / 180)
	return nav.Offset{EastM: east*c + north*s, NorthM: north*c - east*s}
}

func TestSectorAgainstTable(t *testing.T) {
	const r = 926.0
	rows := table(t, "sector.csv")
	legs, err := Sector(0, r, 2, Right)
	if err != nil || len(legs) != len(rows) {
		t.Fatalf("%d legs, %v", len(legs), err)
	}
	near(t, "total", LengthM(legs), 18*r, 1e-9)
	for i, row := range rows {
		// The table has four decimals of the radius.
		near(t, "east", legs[i].To.EastM, row["east_in_R"]*r, 0.00005*r+1e-9)
		near(t, "north", legs[i].To.NorthM, row["north_in_R"]*r, 0.00005*r+1e-9)
		near(t, "course", legs[i].Course.Minus(nav.True(row["heading_deg"])), 0, 1e-9)
	}
}

// Legs parallel to the long side of a 4.0 by 2.0 nm area, spacing 0.2: ten
// legs of 3.8 nm, 39.8 nm together: n(l - S) + (n - 1)S.
func TestSweepLength(t *testing.T) {
	const nm = nav.MetresPerNM
	legs, err := Sweep(nav.Offset{}, 0, 3.8*nm, 0.2*nm, 10, Right)
	if err != nil {
		t.Fatal(err)
	}
	near(t, "total", LengthM(legs)/nm, 39.8, 1e-9)
	last := legs[len(legs)-1]
	near(t, "last leg lies east", last.From.EastM, 9*0.2*nm, 1e-6)
	near(t, "last leg runs south", float64(last.Course), 180, 0)
	if legs[1].Kind != CrossLeg || legs[0].Kind != SearchLeg {
		t.Errorf("kinds %s, %s", legs[0].Kind, legs[1].Kind)
	}
	mirrored, _ := Sweep(nav.Offset{}, 0, 3.8*nm, 0.2*nm, 10, Left)
	near(t, "to the left", mirrored[len(mirrored)-1].From.EastM, -9*0.2*nm, 1e-6)
}

func TestTrackThereAndBack(t *testing.T) {
	points := []nav.Offset{{NorthM: 0}, {NorthM: 5000}, {EastM: 5000, NorthM: 5000}}
	one, err := Track(points, 0)
	if err != nil || len(one) != 2 {
		t.Fatalf("%d legs, %v", len(one), err)
	}
	near(t, "one way", LengthM(one), 10000, 1e-9)
	both, err := Track(points, 200)
	if err != nil || len(both) != 5 {
		t.Fatalf("%d legs, %v", len(both), err)
	}
	// Out 100 m to the right of a right-angled turn to the right: each leg is
	// 100 m shorter than the track's; back on the outside 100 m longer.
	near(t, "out", both[0].LengthM+both[1].LengthM, 2*4900, 1e-6)
	near(t, "across", both[2].LengthM, 200, 1e-6)
	near(t, "back", both[3].LengthM+both[4].LengthM, 2*5100, 1e-6)
	near(t, "first leg lies right of the track", both[0].From.EastM, 100, 1e-9)
	near(t, "last leg ends left of the track", both[4].To.EastM, -100, 1e-9)
}

// Spacing 0.1 nm, 5.0 kn, stream 1.5 kn: the first six legs, 1.2 nm, take 14
// min 24 s through the water, and the track over the ground is shifted 0.36 nm.
func TestScenario19ExpandingSquare(t *testing.T) {
	const nm = nav.MetresPerNM
	legs, err := Square(40, 0.1*nm, 6, Right)
	if err != nil {
		t.Fatal(err)
	}
	for i, want := range []float64{0.1, 0.1, 0.2, 0.2, 0.3, 0.3} {
		near(t, "leg", legs[i].LengthM/nm, want, 1e-12)
	}
	stream := nav.Towards(90, 1.5)
	runs, err := Ride(legs, nav.PositionFromDegrees(54.1, 7.9), begin, Water{SpeedKn: 5, Current: stream, DatumDrift: stream})
	if err != nil {
		t.Fatal(err)
	}
	var total float64
	for _, r := range runs {
		total += r.RunS
		near(t, "heading is the leg's course", r.Steer.Minus(r.Course), 0, 1e-9)
	}
	near(t, "time", total, 14*60+24, 0.01)
	still, _ := Ride(legs, nav.PositionFromDegrees(54.1, 7.9), begin, Water{SpeedKn: 5})
	shift := nav.Inverse(still[5].End, runs[5].End)
	near(t, "shift over the ground", shift.RangeM/nm, 0.36, 0.0005)
	near(t, "towards", float64(shift.Bearing.Or(0)), 90, 0.1)
}

// Radius 0.5 nm, 6.0 kn: nine legs, 4.5 nm, 45 min; the centre moves 1.125 nm
// at 1.5 kn, and each return is to the moved centre.
func TestScenario20SectorSearch(t *testing.T) {
	const nm = nav.MetresPerNM
	datum := nav.PositionFromDegrees(54.1, 7.9)
	drift := nav.Towards(200, 1.5)
	legs, err := Sector(0, 0.5*nm, 1, Right)
	if err != nil {
		t.Fatal(err)
	}
	near(t, "length", LengthM(legs)/nm, 4.5, 1e-12)
	runs, err := Ride(legs, datum, begin, Water{SpeedKn: 6, Current: drift, DatumDrift: drift})
	if err != nil {
		t.Fatal(err)
	}
	var elapsed float64
	for i, r := range runs {
		elapsed += r.RunS
		if i%3 == 2 {
			centre := datum.Shift(drift.Scale(elapsed).For(time.Second))
			near(t, "return to the moved centre", nav.Inverse(centre, r.End).RangeM, 0, 0.5)
		}
	}
	near(t, "time", elapsed, 45*60, 0.01)
	near(t, "centre moved", nav.Inverse(datum, runs[8].End).RangeM/nm, 1.125, 0.001)
}

// Published current triangles. The first three are those at the end of the
// dead reckoning chapter of Bowditch (numbers from memory there); the others
// were worked graphically on a chart and are up to 2.4 degrees off.
func TestCourseToSteer(t *testing.T) {
	tests := []struct {
		source                         string
		track, speed, set, drift       float64
		heading, sog, degTol, speedTol float64
	}{
		{"Bowditch 2", 95, 12, 170, 2.5, 83.5, 12.4, 0.25, 0.05},
		{"chart practice 1", 90, 5, 210, 2, 70, 3.7, 2.5, 0.3},
		{"chart practice 2", 45, 6.55, 135, 2, 25, 6.2, 2.5, 0.3},
		{"chart practice 3", 235, 6.2, 315, 3.5, 200, 5.8, 2.5, 0.3},
		{"chart practice 4", 265, 5.2, 70, 2.3, 260, 3.0, 2.5, 0.3},
		{"chart practice 5", 150, 5.3, 50, 3.5, 190, 3.4, 2.5, 0.3},
		{"chart practice 6", 20, 5.9, 90, 1.9, 0, 6.2, 2.5, 0.3},
		{"lecture slides", 242, 5, 0, 1, 232, 4.4, 0.5, 0.1},
		{"exact, worked from the triangle", 95, 12, 170, 2.5, 83.391, 12.402, 0.0005, 0.0005},
	}
	for _, tt := range tests {
		heading, sog, err := CourseToSteer(nav.True(tt.track), tt.speed, nav.Towards(nav.True(tt.set), tt.drift))
		if err != nil {
			t.Errorf("%s: %v", tt.source, err)
			continue
		}
		near(t, tt.source+" heading", heading.Minus(nav.True(tt.heading)), 0, tt.degTol)
		near(t, tt.source+" speed", sog, tt.sog, tt.speedTol)
	}
}

func TestRefusals(t *testing.T) {
	const nm = nav.MetresPerNM
	water := Water{SpeedKn: 2, Current: nav.Towards(90, 3)}
	north := []Leg{{Course: 0, LengthM: 100, To: nav.Offset{NorthM: 100}}}
	tests := map[string]struct {
		try  func() error
		is   error
		says string
	}{
		"no spacing":         {func() error { _, err := Square(0, 0, 4, Right); return err }, ErrPattern, "spacing"},
		"no number":          {func() error { _, err := Square(0, math.NaN(), 4, Right); return err }, ErrPattern, "spacing"},
		"no legs":            {func() error { _, err := Square(0, 100, 0, Right); return err }, ErrPattern, "legs"},
		"radius of 500 nm":   {func() error { _, err := Sector(0, 500*nm, 1, Right); return err }, ErrPattern, "500 nm from its datum"},
		"a track of a point": {func() error { _, err := Track([]nav.Offset{{}}, 0); return err }, ErrPattern, "two"},
		"a track that doubles back": {func() error {
			_, err := Track([]nav.Offset{{}, {NorthM: 1000}, {NorthM: 10}}, 100)
			return err
		}, ErrPattern, "turns by"},
		"stream across faster than the boat": {func() error {
			_, err := Ride(north, nav.Position{}, begin, water)
			return err
		}, ErrNotMadeGood, "leg 1"},
		"datum that runs away": {func() error {
			_, err := Ride(north, nav.Position{}, begin, Water{SpeedKn: 2, DatumDrift: nav.Towards(0, 3)})
			return err
		}, ErrNotMadeGood, "3.0 kn"},
		"no speed": {func() error { _, err := Ride(north, nav.Position{}, begin, Water{}); return err }, ErrNotMadeGood, "speed"},
	}
	for name, tt := range tests {
		err := tt.try()
		if !errors.Is(err, tt.is) || !strings.Contains(err.Error(), tt.says) {
			t.Errorf("%s: %v, want %v and %q", name, err, tt.is, tt.says)
		}
	}
}

// A vessel that steers the headings for the times, in a current and with a
// datum that drifts, ends each leg where the table says: over the ground, and
// on the leg's end in the datum frame; anywhere on earth.
func TestSimulatedVesselEndsEachLeg(t *testing.T) {
	rapid.Check(t, func(rt *rapid.T) {
		legs := randomLegs(rt)
		datum := nav.PositionFromDegrees(rapid.Float64Range(-80, 80).Draw(rt, "lat"), rapid.Float64Range(-180, 180).Draw(rt, "lon"))
		w := Water{
			SpeedKn:    rapid.Float64Range(4, 20).Draw(rt, "speed"),
			Current:    nav.Towards(nav.True(rapid.Float64Range(0, 360).Draw(rt, "set")), rapid.Float64Range(0, 1.8).Draw(rt, "drift")),
			DatumDrift: nav.Towards(nav.True(rapid.Float64Range(0, 360).Draw(rt, "towards")), rapid.Float64Range(0, 1.8).Draw(rt, "datum drift")),
		}
		runs, err := Ride(legs, datum, begin, w)
		if err != nil {
			rt.Fatalf("ride: %v", err)
		}
		plane := nav.NewPlane(datum)
		at := plane.Offset(runs[0].Start)
		var elapsed, run float64
		for i, r := range runs {
			ground := nav.Towards(r.Steer, w.SpeedKn).Add(w.Current)
			at = at.Add(nav.Offset{EastM: ground.EastMs * r.RunS, NorthM: ground.NorthMs * r.RunS})
			elapsed += r.RunS
			run += r.LengthM
			allowed := 1 + 0.001*run
			if off := at.Sub(plane.Offset(r.End)).RangeM(); off > allowed {
				rt.Fatalf("leg %d ends %v m off over the ground", i+1, off)
			}
			moved := nav.Offset{EastM: w.DatumDrift.EastMs * elapsed, NorthM: w.DatumDrift.NorthMs * elapsed}
			if off := at.Sub(moved).Sub(r.To).RangeM(); off > allowed {
				rt.Fatalf("leg %d ends %v m off in the datum frame", i+1, off)
			}
			if i > 0 && r.From != legs[i-1].To && r.From.Sub(legs[i-1].To).RangeM() > 1e-6 {
				rt.Fatalf("leg %d does not begin where the one before ends", i+1)
			}
		}
	})
}

func randomLegs(rt *rapid.T) []Leg {
	first := nav.True(rapid.Float64Range(0, 360).Draw(rt, "first"))
	turns := rapid.SampledFrom([]Turns{Right, Left}).Draw(rt, "turns")
	spacing := rapid.Float64Range(50, 1000).Draw(rt, "spacing")
	n := rapid.IntRange(1, 12).Draw(rt, "n")
	var legs []Leg
	var err error
	switch rapid.IntRange(0, 2).Draw(rt, "shape") {
	case 0:
		legs, err = Square(first, spacing, n, turns)
	case 1:
		legs, err = Sector(first, spacing, 1+n%3, turns)
	default:
		legs, err = Sweep(nav.Offset{EastM: 500}, first, 3*spacing, spacing, n, turns)
	}
	if err != nil {
		rt.Fatalf("legs: %v", err)
	}
	return legs
}
