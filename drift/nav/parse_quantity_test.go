package nav

import (
	"errors"
	"math"
	"strings"
	"testing"
	"time"

	"pgregory.net/rapid"
)

func TestParseDirection(t *testing.T) {
	for in, want := range map[string]TrueDeg{
		"283": 283, "283T": 283, "283 t": 283, "283°": 283, "283.5°T": 283.5, " 007 ": 7, "0": 0, "360": 0, "360T": 0,
	} {
		if got, err := ParseDirection(in); err != nil || got != want {
			t.Errorf("ParseDirection(%q) = %v, %v, want %v", in, float64(got), err, float64(want))
		}
	}
	for in, says := range map[string]string{
		"": "no figures", "T": "no figures", "361": "more than 360", "-5": "sign", "+5": "sign", "283,5": "point",
		"28.3.5": "not a decimal number", "283M": "magnetic", "283 m": "magnetic", "NW": "no figures", "283X": `"X"`,
		"NaN": "no figures", "1e2": `"e2"`, "0x1F": `"x1F"`, "5.": "not a decimal number", strings.Repeat("1", 10_000): "too long",
	} {
		got, err := ParseDirection(in)
		if err == nil {
			t.Errorf("ParseDirection(%.20q) = %v, want an error", in, got)
			continue
		}
		checkParseError(t, err, ErrDirection)
		if !strings.Contains(err.Error(), says) {
			t.Errorf("ParseDirection(%.20q): %v, want it to say %q", in, err, says)
		}
	}
}

func TestParseDirectionWith(t *testing.T) {
	for in, want := range map[string]TrueDeg{"283M": 286.5, "358 M": 1.5, "283T": 283, "283": 283} {
		if got, err := ParseDirectionWith(in, 3.5); err != nil || got != want {
			t.Errorf("ParseDirectionWith(%q, 3.5 E) = %v, %v, want %v", in, float64(got), err, float64(want))
		}
	}
	if _, err := ParseDirectionWith("283X", 3.5); !errors.Is(err, ErrDirection) || !strings.Contains(err.Error(), "283M") {
		t.Errorf("the error does not name the magnetic form: %v", err)
	}
}

func TestParseDirSpeed(t *testing.T) {
	for in, want := range map[string][2]float64{
		"240/15": {240, 15}, "240T/15kn": {240, 15}, "007 / 1.2": {7, 1.2}, "360/0": {0, 0}, "240°/15 kt": {240, 15},
	} {
		dir, speed, err := ParseDirSpeed(in)
		if err != nil || float64(dir) != want[0] || speed != want[1] {
			t.Errorf("ParseDirSpeed(%q) = %v, %v, %v, want %v", in, float64(dir), speed, err, want)
		}
	}
	tests := []struct {
		in   string
		kind error
		says string
	}{
		{"", ErrDirection, "no /"},
		{"240", ErrDirection, "no /"},
		{"/15", ErrDirection, "direction: there are no figures"},
		{"240/", ErrSpeed, "speed: there are no figures"},
		{"400/15", ErrDirection, "more than 360"},
		{"240M/15", ErrDirection, "magnetic"},
		{"240/-15", ErrSpeed, "sign"},
		{"240/15/3", ErrSpeed, `"/3"`},
		{"240/1500", ErrSpeed, "more than 250"},
		{"240/7,5", ErrSpeed, "point"},
		{"240/7 m/s", ErrSpeed, "m/s"},
		{strings.Repeat("/", 10_000), ErrDirection, "too long"},
	}
	for _, tc := range tests {
		_, _, err := ParseDirSpeed(tc.in)
		if err == nil {
			t.Errorf("ParseDirSpeed(%.20q): want an error", tc.in)
			continue
		}
		checkParseError(t, err, tc.kind)
		if !strings.Contains(err.Error(), tc.says) || !strings.Contains(err.Error(), "240/15") {
			t.Errorf("ParseDirSpeed(%.20q): %v, want it to say %q and the form", tc.in, err, tc.says)
		}
	}
}

func TestParseSpeedAndRange(t *testing.T) {
	tests := []struct {
		parse func(string) (float64, error)
		in    string
		want  float64
		says  string
	}{
		{ParseSpeedKn, "6", 6, ""}, {ParseSpeedKn, "6.5kn", 6.5, ""}, {ParseSpeedKn, "6.5 KTS", 6.5, ""}, {ParseSpeedKn, "0", 0, ""},
		{ParseSpeedKn, "12 km/h", 0, "km/h"}, {ParseSpeedKn, "-1", 0, "sign"}, {ParseSpeedKn, "251", 0, "more than 250"},
		{ParseSpeedKn, "Inf", 0, "no figures"}, {ParseSpeedKn, "", 0, "no figures"},
		{ParseRangeNM, "0.5", 0.5, ""}, {ParseRangeNM, "0.5nm", 0.5, ""}, {ParseRangeNM, "12 NM", 12, ""},
		{ParseRangeNM, "220m", 0, `"m"`}, {ParseRangeNM, "2M", 0, `"M"`}, {ParseRangeNM, "20000", 0, "more than 10820"},
		{ParseRangeNM, "½", 0, "no figures"}, {ParseRangeNM, "1 2", 0, `"2"`},
	}
	for _, tc := range tests {
		got, err := tc.parse(tc.in)
		if (err == nil) != (tc.says == "") || got != tc.want {
			t.Errorf("%q = %v, %v, want %v", tc.in, got, err, tc.want)
			continue
		}
		if err != nil {
			checkParseError(t, err, ErrSpeed, ErrRange)
			if !strings.Contains(err.Error(), tc.says) {
				t.Errorf("%q: %v, want it to say %q", tc.in, err, tc.says)
			}
		}
	}
}

func TestParseTime(t *testing.T) {
	for in, want := range map[string]time.Time{
		"2026-05-04T14:30:00Z":       time.Date(2026, 5, 4, 14, 30, 0, 0, time.UTC),
		"2026-05-04t14:30:00.25z":    time.Date(2026, 5, 4, 14, 30, 0, 250e6, time.UTC),
		" 2026-05-04T16:30:00+02:00": time.Date(2026, 5, 4, 14, 30, 0, 0, time.UTC),
		"2026-05-04T23:30:00-09:30":  time.Date(2026, 5, 5, 9, 0, 0, 0, time.UTC),
	} {
		if got, err := ParseTime(in); err != nil || got != want {
			t.Errorf("ParseTime(%q) = %v, %v, want %v", in, got, err, want)
		}
	}
	for in, says := range map[string]string{
		"": "nothing", "14:30": "date must be", "2026-05-04": "no time of day", "2026-05-04T14:30:00": "no zone",
		"2026-05-04T14:30:00.5": "no zone", "2026-05-04 14:30:00Z": "there must be T", "2026-05-04T14:30Z": "hours, minutes and seconds",
		"2026-05-04T1:30:00Z": "hours, minutes and seconds", "2026-02-30T14:30:00Z": "no such date", "2026-05-04T25:30:00Z": "no such",
		"2026-05-04T14:30:60Z": "no such", "2026-05-04T14:30:00,5Z": "zone must be", "2026-05-04T14:30:00.Z": "decimal point",
		"2026-05-04T14:30:00 UTC": "zone must be", "2026-05-04T14:30:00+0200": "zone must be", "2026-05-04T14:30:00+25:00": "no such",
		"04/05/2026 14:30": "date must be", strings.Repeat("2", 10_000): "date must be",
	} {
		got, err := ParseTime(in)
		if err == nil {
			t.Errorf("ParseTime(%.40q) = %v, want an error", in, got)
			continue
		}
		checkParseError(t, err, ErrTime)
		if !strings.Contains(err.Error(), says) || !strings.Contains(err.Error(), "2026-05-04T14:30:00Z") {
			t.Errorf("ParseTime(%.40q): %v, want it to say %q and the form", in, err, says)
		}
	}
}

func TestDirectionPrintThenParse(t *testing.T) {
	rapid.Check(t, func(t *rapid.T) {
		dir := True(rapid.Float64Range(0, 360).Draw(t, "deg"))
		got, err := ParseDirection(dir.String())
		// Printed to whole degrees: half a step, and an ulp of 360 for Minus.
		if err != nil || math.Abs(got.Minus(dir)) > 0.5+1e-13 {
			t.Fatalf("%v printed %s, read %v, %v", float64(dir), dir, float64(got), err)
		}
	})
}

func TestTimePrintThenParse(t *testing.T) {
	rapid.Check(t, func(t *rapid.T) {
		at := time.Unix(rapid.Int64Range(0, 4e9).Draw(t, "s"), rapid.Int64Range(0, 1e9-1).Draw(t, "ns"))
		zone := time.FixedZone("", 60*rapid.IntRange(-14*60, 14*60).Draw(t, "offset in minutes"))
		got, err := ParseTime(at.In(zone).Format(time.RFC3339Nano))
		if err != nil || !got.Equal(at) || got.Location() != time.UTC {
			t.Fatalf("%v: %v, %v", at.In(zone), got, err)
		}
	})
}

func FuzzParseDirSpeed(f *testing.F) {
	for _, in := range []string{"240/15", "240T/15kn", "240M/15", "/", "360/250", "240/7,5", "0x1/1e5", "\xff/°"} {
		f.Add(in)
	}
	f.Fuzz(func(t *testing.T, in string) {
		dir, speed, err := ParseDirSpeed(in)
		if err != nil {
			checkParseError(t, err, ErrDirection, ErrSpeed)
			return
		}
		if !(dir >= 0 && dir < 360) || !(speed >= 0 && speed <= maxSpeedKn) {
			t.Fatalf("ParseDirSpeed(%q) = %v, %v", in, float64(dir), speed)
		}
	})
}

func FuzzParseNumbers(f *testing.F) {
	for _, in := range []string{"0.5", "12 nm", "6.5kn", "283M", "283°T", "1e9", "-0", ".5", "5.", "NaN", "9999999999999999999999999"} {
		f.Add(in)
	}
	f.Fuzz(func(t *testing.T, in string) {
		if v, err := ParseSpeedKn(in); err != nil {
			checkParseError(t, err, ErrSpeed)
		} else if !(v >= 0 && v <= maxSpeedKn) {
			t.Fatalf("ParseSpeedKn(%q) = %v", in, v)
		}
		if v, err := ParseRangeNM(in); err != nil {
			checkParseError(t, err, ErrRange)
		} else if !(v >= 0 && v <= maxRangeNM) {
			t.Fatalf("ParseRangeNM(%q) = %v", in, v)
		}
		if v, err := ParseDirectionWith(in, -12.5); err != nil {
			checkParseError(t, err, ErrDirection)
		} else if !(v >= 0 && v < 360) {
			t.Fatalf("ParseDirectionWith(%q) = %v", in, float64(v))
		}
	})
}

func FuzzParseTime(f *testing.F) {
	for _, in := range []string{"2026-05-04T14:30:00Z", "2026-05-04T14:30:00.5+02:00", "2026-05-04", "0000-00-00T00:00:00-00:00", "9999-12-31T23:59:59.999999999Z"} {
		f.Add(in)
	}
	f.Fuzz(func(t *testing.T, in string) {
		at, err := ParseTime(in)
		if err != nil {
			checkParseError(t, err, ErrTime)
			return
		}
		again, err := ParseTime(at.Format(time.RFC3339Nano))
		// A zone can carry a time over the edge of the four-figure years.
		if at.Year() >= 0 && at.Year() <= 9999 && (err != nil || !again.Equal(at)) {
			t.Fatalf("ParseTime(%q) = %v, again %v, %v", in, at, again, err)
		}
	})
}
