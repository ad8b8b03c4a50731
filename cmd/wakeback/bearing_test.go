package main

import (
	"math"
	"os/exec"
	"strconv"
	"strings"
	"testing"
)

func number(t *testing.T, doc map[string]any, name string) float64 {
	t.Helper()
	v, ok := doc[name].(float64)
	if !ok {
		t.Fatalf("%s = %v, want a number; all: %v", name, doc[name], doc)
	}
	return v
}

// A bearing is the same whichever way the positions are typed, and GeodSolve
// finds the same line.
func TestBearing(t *testing.T) {
	want := document(t, call(t, "bearing", "54.1,7.9", "54.2,8.1", "--at", "2026-07-01T12:00:00Z", "--json"))
	for _, from := range []string{"54 06.00N 007 54.00E", "54°06.0'N 7°54'E", "54.1 N 7.9 E", `54°06'00"N 7°54'00"E`} {
		got := document(t, call(t, "bearing", from, "54 12.00N 008 06.00E", "--at", "2026-07-01T12:00:00Z", "--json"))
		for _, name := range []string{"range_m", "range_nm", "bearing_deg", "bearing_mag_deg", "variation_deg"} {
			// Typed forms differ by the last bit of a degree: under 1e-8 m.
			if math.Abs(number(t, got, name)-number(t, want, name)) > 1e-7 {
				t.Errorf("from %s: %s = %v, want %v", from, name, got[name], want[name])
			}
		}
	}
	if nm := number(t, want, "range_m") / 1852; nm != number(t, want, "range_nm") {
		t.Errorf("range_nm = %v, want %v", want["range_nm"], nm)
	}
	mag := number(t, want, "bearing_deg") - number(t, want, "variation_deg")
	if math.Abs(mag-number(t, want, "bearing_mag_deg")) > 1e-9 {
		t.Errorf("bearing_mag_deg = %v, want %v", want["bearing_mag_deg"], mag)
	}
}

func TestBearingAgainstGeodSolve(t *testing.T) {
	if _, err := exec.LookPath("GeodSolve"); err != nil {
		t.Skip("GeodSolve is not installed: Debian package geographiclib-tools")
	}
	for _, pair := range [][2]string{{"54.1,7.9", "54.2,8.1"}, {"-33.858,151.215", "-33.9,151.3"}, {"0.5,179.9", "-0.5,-179.9"}, {"89,10", "89,-170"}} {
		c := exec.Command("GeodSolve", "-i", "-p", "7")
		c.Stdin = strings.NewReader(strings.NewReplacer(",", " ").Replace(pair[0]+" "+pair[1]) + "\n")
		out, err := c.Output()
		if err != nil {
			t.Fatal(err)
		}
		f := strings.Fields(string(out)) // azi1 azi2 s12
		azimuth, _ := strconv.ParseFloat(f[0], 64)
		rangeM, _ := strconv.ParseFloat(f[2], 64)
		got := document(t, call(t, "bearing", pair[0], pair[1], "--json", "--at", "2026-07-01T12:00:00Z"))
		// GeodSolve prints to 1e-7 m, and angles to an arc of that at the surface
		// over 1 m; the lines here are over 1 km.
		if d := math.Abs(number(t, got, "range_m") - rangeM); d > 2e-7 {
			t.Errorf("%v: range_m = %v, GeodSolve %v", pair, got["range_m"], rangeM)
		}
		if d := math.Remainder(number(t, got, "bearing_deg")-azimuth, 360); math.Abs(d) > 1e-7 {
			t.Errorf("%v: bearing_deg = %v, GeodSolve %v", pair, got["bearing_deg"], azimuth)
		}
	}
}

// Where the magnetic model does not hold, the true bearing stays, and what is
// not known is null with the reason.
func TestBearingWithoutVariation(t *testing.T) {
	o := call(t, "bearing", "54.1,7.9", "54.2,8.1", "--at", "2031-01-01T00:00:00Z", "--json")
	doc := document(t, o)
	if doc["variation_deg"] != nil || doc["bearing_mag_deg"] != nil {
		t.Errorf("magnetic = %v %v, want null", doc["variation_deg"], doc["bearing_mag_deg"])
	}
	number(t, doc, "bearing_deg")
	for _, text := range []string{o.err, doc["variation_note"].(string)} {
		if !strings.Contains(text, "2025 to 2029") {
			t.Errorf("%q does not say which years are covered", text)
		}
	}
}

func TestBearingOfOnePlace(t *testing.T) {
	doc := document(t, call(t, "bearing", "54.1,7.9", "54 06.00N 007 54.00E", "--json"))
	if doc["bearing_deg"] != nil || number(t, doc, "range_m") > 1e-7 {
		t.Errorf("to the same place: %v", doc)
	}
	o := call(t, "bearing", "54.1,7.9", "54.1,7.9")
	if !strings.Contains(o.out, "none: it is the same place") {
		t.Errorf("to the same place: %q", o.out)
	}
}

func TestBearingTable(t *testing.T) {
	o := call(t, "bearing", "-33.858,151.215", "-33.9,151.3", "--at", "2026-07-01T12:00:00Z")
	for _, want := range []string{"33°51.480'S 151°12.900'E", "nm, ", "° true, ", "° magnetic", "°E on 2026-07-01"} {
		if !strings.Contains(o.out, want) {
			t.Errorf("table %q lacks %q", o.out, want)
		}
	}
}
