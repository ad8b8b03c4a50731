package nav

import (
	"encoding/json"
	"errors"
	"math"
	"strings"
	"testing"

	"pgregory.net/rapid"
)

func TestPositionFromDegrees(t *testing.T) {
	for _, c := range []struct{ lon, want float64 }{
		{0, 0}, {180, -180}, {-180, -180}, {181, -179}, {-181, 179}, {540, -180}, {360, 0}, {179.5, 179.5},
	} {
		// 180 degrees and more are held in steps of 6e-14 degree.
		if got := PositionFromDegrees(10, c.lon).LonDeg(); math.Abs(got-c.want) > 6e-14 {
			t.Errorf("longitude %v became %v, want %v", c.lon, got, c.want)
		}
	}
	rapid.Check(t, func(t *rapid.T) {
		lon := rapid.OneOf(rapid.Float64(), rapid.Float64Range(179.9999999999999, 180)).Draw(t, "lon")
		p := PositionFromDegrees(0, lon)
		if d := p.LonDeg(); !(d >= -180 && d < 180) || !(p.Lng >= -math.Pi && p.Lng < math.Pi) {
			t.Fatalf("longitude %v became %v", lon, d)
		}
	})
}

func TestPositionValidate(t *testing.T) {
	inf := math.Inf(1)
	for _, c := range []struct {
		lat, lon float64
		word     string // expected in the error; empty: valid
	}{
		{0, 0, ""}, {90, 0, ""}, {-90, 179, ""}, {54.1, -180, ""},
		{90.1, 0, "latitude"}, {-91, 0, "latitude"}, {math.NaN(), 0, "latitude"}, {inf, 0, "latitude"},
		{0, math.NaN(), "longitude"}, {0, 180.1, "longitude"}, {0, -inf, "longitude"},
	} {
		err := Position{degrees(c.lat), degrees(c.lon)}.Validate()
		if c.word == "" {
			if err != nil {
				t.Errorf("%v, %v: %v", c.lat, c.lon, err)
			}
			continue
		}
		if !errors.Is(err, ErrPosition) || !strings.Contains(err.Error(), c.word) || !strings.Contains(err.Error(), "expected") {
			t.Errorf("%v, %v: error %v, want one that names the %s and what was expected", c.lat, c.lon, err, c.word)
		}
	}
}

func TestPositionJSON(t *testing.T) {
	for _, c := range []struct {
		lat, lon float64
		want     string
	}{
		{54.1, 7.9, `{"lat":54.1,"lon":7.9}`},
		{0, 0, `{"lat":0,"lon":0}`},
		{-1e-9, -1e-9, `{"lat":0,"lon":0}`},
		{-33.85678125, 151.21529654, `{"lat":-33.8567813,"lon":151.2152965}`},
		{0, 179.99999999, `{"lat":0,"lon":-180}`},
		{0, -179.99999999, `{"lat":0,"lon":-180}`},
		{89.99999999, 1, `{"lat":90,"lon":1}`},
	} {
		got, err := json.Marshal(PositionFromDegrees(c.lat, c.lon))
		if err != nil || string(got) != c.want {
			t.Errorf("%v, %v: %s, %v, want %s", c.lat, c.lon, got, err, c.want)
		}
	}
	if got, err := json.Marshal(PositionFromDegrees(math.NaN(), 0)); !errors.Is(err, ErrPosition) {
		t.Errorf("what is no position was written: %s, %v", got, err)
	}
}

func TestPositionJSONRefuses(t *testing.T) {
	for _, c := range []struct{ in, word string }{
		{`{}`, "missing"}, {`{"lat":1}`, "missing"}, {`{"lon":1}`, "missing"}, {`{"lat":null,"lon":1}`, "missing"},
		{`{"lat":91,"lon":1}`, "latitude"}, {`{"lat":1,"lon":181}`, "longitude"},
		{`{"lat":"54","lon":1}`, "degrees"}, {`[54,7]`, "degrees"}, {`"54N"`, "degrees"},
	} {
		before := PositionFromDegrees(1, 2)
		p := before
		err := json.Unmarshal([]byte(c.in), &p)
		if !errors.Is(err, ErrPosition) || !strings.Contains(err.Error(), c.word) {
			t.Errorf("%s: %v, want an error with %q", c.in, err, c.word)
		}
		if p != before {
			t.Errorf("%s: refused, and changed the position to %v", c.in, p)
		}
	}
}

// TestPositionJSONReturns: written, read and written again it stays the same,
// and within half a step of 1e-7 degree of what it was.
func TestPositionJSONReturns(t *testing.T) {
	rapid.Check(t, func(t *rapid.T) {
		p := anyPosition(t, "p")
		first, err := json.Marshal(p)
		if err != nil {
			t.Fatal(err)
		}
		var back Position
		if err := json.Unmarshal(first, &back); err != nil {
			t.Fatalf("%s: %v", first, err)
		}
		second, err := json.Marshal(back)
		if err != nil || string(second) != string(first) {
			t.Fatalf("%s was read and written as %s, %v", first, second, err)
		}
		// Half a step in both coordinates, 5e-8 degree, is at most 7.9 mm.
		if off := Inverse(p, back).RangeM; !(off < 0.0079) {
			t.Fatalf("%s is %v m off", first, off)
		}
	})
}
