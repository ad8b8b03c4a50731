package main

import (
	"math"
	"strings"
	"testing"

	"wakeback/drift/nav"
)

// oneDocument runs a command with --json and reads its one document.
func oneDocument(t *testing.T, args ...string) map[string]any {
	t.Helper()
	return document(t, call(t, append(args, "--json")...))
}

func figure(t *testing.T, doc map[string]any, path string) float64 {
	t.Helper()
	var v any = doc
	for _, key := range strings.Split(path, ".") {
		m, ok := v.(map[string]any)
		if !ok {
			t.Fatalf("no %s in %v", path, doc)
		}
		v = m[key]
	}
	f, ok := v.(float64)
	if !ok {
		t.Fatalf("%s = %v, want a number", path, v)
	}
	return f
}

func near(t *testing.T, what string, got, want, tolerance float64) {
	t.Helper()
	if math.IsNaN(got) || math.Abs(got-want) > tolerance {
		t.Errorf("%s = %v, want %v within %v", what, got, want, tolerance)
	}
}

// Mark 50 40.000 N 001 10.000 W, stream 090 at 1.8 kn, twelve minutes: 0.36 nm east.
func TestScenario11OnTheCommandLine(t *testing.T) {
	args := []string{"drift", "--mark", "50 40.000N 001 10.000W", "--marked", "2026-06-01T02:00:00Z", "--at", "2026-06-01T02:12:00Z",
		"--object", "person", "--wind", "0/0", "--current", "90/1.8"}
	doc := oneDocument(t, args...)
	want := nav.PositionFromDegrees(50+40.0/60, -(1 + 9.432/60))
	got := nav.PositionFromDegrees(figure(t, doc, "datum.lat"), figure(t, doc, "datum.lon"))
	near(t, "off the datum of the scenario", nav.Inverse(want, got).RangeM, 0, 5)
	for _, path := range []string{"leeway.speed_kn", "total_error_m", "cloud.n", "cloud.mean.lat", "cloud.sd_major_m", "cloud.sd_minor_m", "cloud.axis_deg", "cloud.r50_m", "cloud.r95_m"} {
		figure(t, doc, path)
	}
	if a, b := call(t, append(args, "--seed", "7", "--json")...), call(t, append(args, "--seed", "7", "--json")...); a.out != b.out {
		t.Error("the same seed gives another cloud")
	}
}

// Leeway of a person of whom nothing is known in 15 kn from 240: 0.235 kn to
// 060, 30 degrees to either side (Allen and Plourde 1999, table 8-1, from memory).
func TestLeewayOnTheCommandLine(t *testing.T) {
	doc := oneDocument(t, "drift", "--mark", "54.1,7.9", "--marked", "2026-06-01T02:00:00Z", "--at", "2026-06-01T04:00:00Z", "--wind", "240/15", "--current", "100/1.2")
	near(t, "leeway", figure(t, doc, "leeway.speed_kn"), 0.235, 0.0005)
	near(t, "towards", figure(t, doc, "leeway.towards_deg"), 60, 1e-6)
	near(t, "divergence", figure(t, doc, "leeway.divergence_deg"), 30, 1e-9)
	at := nav.PositionFromDegrees(figure(t, doc, "datum.lat"), figure(t, doc, "datum.lon"))
	line := nav.Inverse(nav.PositionFromDegrees(54.1, 7.9), at)
	// 2 h of 1.2 kn to 100 and of that leeway: 093.75, 2.7765 nm (worked by hand).
	near(t, "range", line.RangeM/nav.MetresPerNM, 2.7765, 0.001)
	near(t, "bearing", float64(line.Bearing.Or(0)), 93.75, 0.05)
	figure(t, doc, "datum_left.lat")
	figure(t, doc, "datum_right.lat")
}

// Scenarios 19 and 20: the expanding square and the sector search.
func TestScenario19And20OnTheCommandLine(t *testing.T) {
	square := oneDocument(t, "legs", "square", "--datum", "54.1,7.9", "--spacing", "0.1", "--first", "40", "--legs", "6", "--speed", "5",
		"--current", "90/1.5", "--datum-drift", "90/1.5", "--begin", "2026-06-01T02:00:00Z")
	near(t, "length", figure(t, square, "total_m")/nav.MetresPerNM, 1.2, 1e-9)
	near(t, "time", figure(t, square, "total_s"), 14*60+24, 0.01)
	legs := square["legs"].([]any)
	if len(legs) != 6 {
		t.Fatalf("%d legs", len(legs))
	}
	first := legs[0].(map[string]any)
	for _, key := range []string{"n", "course_deg", "length_m", "steer_deg", "ground_course_deg", "run_s"} {
		figure(t, first, key)
	}
	if first["begin_at"] != "2026-06-01T02:00:00Z" {
		t.Errorf("begin_at = %v", first["begin_at"])
	}
	sector := oneDocument(t, "legs", "sector", "--datum", "54.1,7.9", "--radius", "0.5", "--first", "0", "--speed", "6", "--begin", "2026-06-01T02:00:00Z")
	near(t, "sector length", figure(t, sector, "total_m")/nav.MetresPerNM, 4.5, 1e-9)
	near(t, "sector time", figure(t, sector, "total_s"), 45*60, 0.01)
	for _, kind := range []string{"parallel", "creeping"} {
		d := oneDocument(t, "legs", kind, "--start", "54.1,7.9", "--along", "0", "--length", "3.8", "--spacing", "0.2", "--legs", "10", "--speed", "5")
		near(t, kind, figure(t, d, "total_m")/nav.MetresPerNM, 39.8, 1e-9)
	}
	track := oneDocument(t, "legs", "track", "--along", "54.1,7.9", "--along", "54.2,7.9", "--spacing", "0.2", "--speed", "5")
	if n := len(track["legs"].([]any)); n != 3 {
		t.Errorf("there and back has %d legs", n)
	}
}

func TestTurnOnTheCommandLine(t *testing.T) {
	doc := oneDocument(t, "turn", "williamson", "--heading", "90", "--speed", "6", "--side", "starboard", "--turn-radius", "18", "--delay", "20")
	orders := doc["orders"].([]any)
	for i, want := range []float64{150, 290, 270} {
		near(t, "until", figure(t, orders[i].(map[string]any), "until_heading_deg"), want, 0.1)
	}
	point := doc["path"].([]any)[0].(map[string]any)
	near(t, "begins east of the mark", figure(t, point, "x_m"), 20*6*nav.MsPerKn, 0.1)
	near(t, "and not north of it", figure(t, point, "y_m"), 0, 0.1)
	for _, path := range []string{"total_s", "closest_m"} {
		figure(t, doc, path)
	}
}

// Bad input of each sort: exit 2, and a message that names what is wrong.
func TestReckoningRefuses(t *testing.T) {
	drift := []string{"drift", "--mark", "54.1,7.9", "--marked", "2026-06-01T02:00:00Z"}
	square := []string{"legs", "square", "--datum", "54.1,7.9", "--spacing", "0.1", "--first", "40"}
	turn := []string{"turn", "single", "--heading", "90", "--speed", "6", "--turn-radius", "18"}
	with := func(base []string, more ...string) []string { return append(append([]string(nil), base...), more...) }
	tests := map[string]struct {
		args []string
		says string
	}{
		"no mark":              {[]string{"drift"}, "--mark"},
		"no such class":        {with(drift, "--object", "whale"), "whale"},
		"wind without speed":   {with(drift, "--wind", "240"), "--wind"},
		"time without zone":    {with(drift, "--at", "2026-06-01T02:00:00"), "--at"},
		"no members":           {with(drift, "--particles", "-5"), "particles"},
		"spacing of nothing":   {[]string{"legs", "square", "--datum", "54.1,7.9", "--spacing", "0", "--first", "40"}, "spacing"},
		"radius of 500 nm":     {[]string{"legs", "sector", "--datum", "54.1,7.9", "--radius", "500", "--first", "40"}, "500 nm"},
		"stream beats boat":    {with(square, "--speed", "1", "--current", "90/3"), "cannot be made good"},
		"speed of nothing":     {with(square, "--speed", "0"), "--speed"},
		"turns upward":         {with(square, "--turns", "up"), "--turns"},
		"one point of a track": {[]string{"legs", "track", "--along", "54.1,7.9"}, "two"},
		"no such manoeuvre":    {[]string{"turn", "pirouette", "--heading", "90", "--speed", "6", "--turn-radius", "18", "--side", "port"}, "pirouette"},
		"side below":           {with(turn, "--side", "below"), "--side"},
		"scharnow too soon":    {[]string{"turn", "scharnow", "--heading", "90", "--speed", "6", "--turn-radius", "18", "--side", "port"}, "beyond the person"},
	}
	for name, tt := range tests {
		t.Run(name, func(t *testing.T) {
			o := call(t, tt.args...)
			if o.code != 2 || !strings.Contains(o.err, tt.says) || o.out != "" {
				t.Errorf("exit %d, out %q, err %q; want 2 and %q", o.code, o.out, o.err, tt.says)
			}
		})
	}
}
