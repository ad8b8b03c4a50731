package nav

import (
	"errors"
	"math"
	"strings"
	"testing"
	"unicode/utf8"
)

// goodPositions are forms that are in use at sea, on charts, in instruments
// and in files. Expected degrees are worked out by hand.
var goodPositions = []struct {
	name, in string
	lat, lon float64
}{
	{"decimal, comma", "54.1,7.9", 54.1, 7.9},
	{"decimal, comma and space", "54.1, 7.9", 54.1, 7.9},
	{"decimal, space", "54.1 7.9", 54.1, 7.9},
	{"decimal, semicolon", "54.1;7.9", 54.1, 7.9},
	{"decimal, south and west", "-33.858,-151.215", -33.858, -151.215},
	{"decimal, space and minus", "54.1 -7.9", 54.1, -7.9},
	{"decimal, Unicode minus", "\u221233.5, \u2212151.2", -33.5, -151.2},
	{"decimal, zeros in front", "054.1,007.9", 54.1, 7.9},
	{"decimal, whole degrees", "54,7", 54, 7},
	{"decimal, origin", "0,0", 0, 0},
	{"decimal, degree marks", "54.1°, 7.9°", 54.1, 7.9},
	{"decimal, degree marks, no comma", "54.1° -7.9°", 54.1, -7.9},
	{"decimal, white space around", "  54.1 ,\t7.9\n", 54.1, 7.9},
	{"no-break and zero-width spaces", "54.1,\u00A07.9\u200B", 54.1, 7.9},
	{"RFC 5870", "geo:54.1,7.9", 54.1, 7.9},
	{"RFC 5870, altitude, uncertainty", "GEO:-54.1,-7.9,12;crs=wgs84;u=35", -54.1, -7.9},
	{"ISO 6709, degrees", "+54.1+007.9/", 54.1, 7.9},
	{"ISO 6709, degrees, west", "+54.1-007.9/", 54.1, -7.9},
	{"ISO 6709, degrees and minutes", "+5406.00+00754.00/", 54.1, 7.9},
	{"letters, decimal", "54.1N 7.9E", 54.1, 7.9},
	{"letters, lower case", "54.1n 7.9w", 54.1, -7.9},
	{"letters, comma", "54.1N,7.9E", 54.1, 7.9},
	{"letters in front, comma", "N54.1,E7.9", 54.1, 7.9},
	{"letters, no space", "54.1N7.9E", 54.1, 7.9},
	{"letters say longitude first", "7.9E 54.1N", 54.1, 7.9},
	{"letters in front, longitude first", "W 007 54.0 S 54 06.0", -54.1, -7.9},
	{"degrees and minutes", "54 06.00N 007 54.00E", 54.1, 7.9},
	{"degrees and minutes, letters apart", "54 06.00 N 007 54.00 E", 54.1, 7.9},
	{"degrees and minutes, marks", "54°06.0'N 7°54'E", 54.1, 7.9},
	{"degrees and minutes, primes", "54°06.0′N 7°54′E", 54.1, 7.9},
	{"degrees and minutes, typographic quotes", "54°06.0’N 7°54’E", 54.1, 7.9},
	{"degrees and minutes, ordinal sign", "54º 06.0' N, 7º 54' E", 54.1, 7.9},
	{"degrees and minutes, no minute mark", "54°06.0N 7°54E", 54.1, 7.9},
	{"degrees and minutes, slash", "54°06.0'N / 7°54.0'E", 54.1, 7.9},
	{"letters in front", "S33 51.5 E151 12.9", -(33 + 51.5/60), 151 + 12.9/60},
	{"letters in front, apart", "N 54 06.0 E 7 54.0", 54.1, 7.9},
	{"letters in front, comma", "N 54 06.0, E 7 54.0", 54.1, 7.9},
	{"hyphens", "54-06.0N 007-54.0E", 54.1, 7.9},
	{"hyphens, seconds", "54-06-00N 007-54-00W", 54.1, -7.9},
	{"colons", "54:06:00N 7:54:00E", 54.1, 7.9},
	{"signs for letters", "-33°51.5', +151°12.9'", -(33 + 51.5/60), 151 + 12.9/60},
	{"signs for letters, no comma", "-33 51.5 +151 12.9", -(33 + 51.5/60), 151 + 12.9/60},
	{"run together", "5406.00N 00754.00E", 54.1, 7.9},
	{"run together, as in NMEA 0183", "5406.00,N,00754.00,E", 54.1, 7.9},
	{"run together, letters in front", "N5406.0E00754.0", 54.1, 7.9},
	{"run together, seconds", "540600N 0075400E", 54.1, 7.9},
	{"run together, no space", "5406N00754E", 54.1, 7.9},
	{"whole degrees", "54N 007E", 54, 7},
	{"seconds", `54°06'00"N 7°54'00"E`, 54.1, 7.9},
	{"seconds, primes", "54°06′00″N 7°54′00″E", 54.1, 7.9},
	{"seconds, two primes", "54°06'00''N 7°54'00''E", 54.1, 7.9},
	{"seconds, spaces", "54 06 30.6 N 7 54 36 E", 54 + 6.51/60, 7 + 54.6/60},
	{"decimal comma, minute mark", "54°06,60'N 7°54,00'E", 54.11, 7.9},
	{"decimal comma, degree mark", "54,1°N 7,9°E", 54.1, 7.9},
	{"words", "54 degrees 06.0 minutes north 7 degrees 54 minutes east", 54.1, 7.9},
	{"units in short", "54deg 06.0min N 7deg 54min W", 54.1, -7.9},
	{"labels", "lat 54.1 lon 7.9", 54.1, 7.9},
	{"labels, longitude first", "Lon: -7.9, Lat: 54.1", 54.1, -7.9},
	{"labels and letters", "Lat 54°06.0'N Long 007°54.0'E", 54.1, 7.9},
	{"labels and letters in front", "Lat N 54 06.0 Lon E 7 54.0", 54.1, 7.9},
	{"north pole", "90N 0E", 90, 0},
	{"south pole", "90°00.000'S 180°00.000'W", -90, -180},
	{"antimeridian, east", "0,180", 0, -180},
	{"antimeridian, west", "17°S 180°W", -17, -180},
	{"last before the antimeridian", "0°N 179°59.999'E", 0, 179 + 59.999/60},
}

func TestParsePosition(t *testing.T) {
	for _, tc := range goodPositions {
		got, err := ParsePosition(tc.in)
		if err != nil {
			t.Errorf("%s: ParsePosition(%q): %v", tc.name, tc.in, err)
			continue
		}
		// The sum of three parts and the way through radians lose a few ulps
		// of 180 degrees, 2.8e-14 each.
		const tolDeg = 2e-13
		if math.Abs(got.LatDeg()-tc.lat) > tolDeg || math.Abs(got.LonDeg()-tc.lon) > tolDeg {
			t.Errorf("%s: ParsePosition(%q) = %v %v, want %v %v", tc.name, tc.in, got.LatDeg(), got.LonDeg(), tc.lat, tc.lon)
		}
	}
}

// badPositions are refused; says is in the message.
var badPositions = []struct {
	name, in, says string
}{
	{"empty", "", "nothing was given"},
	{"blank", " \t ", "nothing was given"},
	{"half", "54.1", "only one coordinate"},
	{"half, letter", "54 06.0N", "there must be one of N, S and one of E, W"},
	{"words only", "N E", "no figures"},
	{"half behind a comma", "54.1,", "only one coordinate"},

	{"degrees and minutes of one coordinate, or two coordinates", "54 7", "where the latitude ends"},
	{"latitude without longitude", "54 06.5", "where the latitude ends"},
	{"hyphen or minus", "54.1-7.9", "where the latitude ends"},
	{"dash between", "54.1 - 7.9", "where the latitude ends"},
	{"decimal commas, space", "54,1 7,9", "decimal mark"},
	{"decimal commas, commas", "54,1,7,9", "decimal mark"},
	{"decimal commas, semicolon", "54,1;7,9", "decimal mark"},
	{"decimal commas, letters", "54,1N 7,9E", "decimal mark"},
	{"decimal commas in minutes", "54 06,50N 007 54,00E", "decimal mark"},
	{"points between all parts", "54.06.00N 007.54.00E", "decimal point"},
	{"no hemisphere", "54 06.0, 7 54.0", "which hemisphere"},
	{"no hemisphere, marks", "54°06.0' 7°54.0'", "which hemisphere"},
	{"no hemisphere, one sign", "54°06.0', -7°54.0'", "which hemisphere"},
	{"no hemisphere, run together", "5406.00,00754.00", "which hemisphere"},
	{"no hemisphere, labels", "lat 54 06.0 lon 7 54.0", "which hemisphere"},
	{"O for east or west", "54 06.0N 7 54.0O", "write E or W"},
	{"Ost", "54N 7Ost", "write E or W"},
	{"run together, a zero missing", "5406.00N 0754.00E", "more than one way"},
	{"run together, three figures", "054.1N 7.9E", "more than one way"},
	{"run together and not", "5406.00N 54.00E", "run together"},
	{"direction and speed", "040/15", "direction and a speed"},

	{"sign and letter", "-33.5S 151.2E", "a sign and a letter"},
	{"sign and letter in front", "S-33.5 E151.2", "a sign and a letter"},
	{"one letter", "54.1N,7.9", "once each"},
	{"three letters", "54N 7E 8W", "once each"},
	{"letters before and after", "N54 06.0 7 54.0E", "both before or both after"},
	{"letters after and inside", "54 N 06.0 7 E 54.0", "both before or both after"},
	{"two latitudes", "54.1N 7.9S", "both coordinates are a latitude"},
	{"two longitudes", "54.1E 7.9W", "both coordinates are a longitude"},
	{"letter and label disagree", "lat 54.1E lon 7.9N", "does not belong"},
	{"one label", "lat 54.1, 7.9", "once each"},
	{"latitude beyond 90", "90.0001,0", "beyond 90"},
	{"latitude beyond 90, minutes", "90 00.001N 0 0.0E", "beyond 90"},
	{"coordinates swapped", "151.2,-33.5", "latitude: 151.2 degrees is beyond 90"},
	{"longitude beyond 180", "0,180.0001", "beyond 180"},
	{"longitude to 360", "54.1,352.1", "beyond 180"},
	{"minutes of 60", "54 60.0N 7 54.0E", "latitude: minutes 60.0 must be less than 60"},
	{"minutes of 60, run together", "5406.00N 00760.00E", "longitude: minutes 60.00 must be less than 60"},
	{"seconds of 60", `54°06'60"N 7°54'00"E`, "seconds 60 must be less than 60"},
	{"minutes of three figures", "54 006.0N 7 54.0E", "more than two figures"},
	{"fraction of degrees before minutes", "54.5 06.0N 7 54.0E", "have a fraction"},
	{"fraction of minutes before seconds", "54 06.5 10N 7 54 00E", "have a fraction"},
	{"four figures", "54 06 00 00N 7 54 00 00E", "more figures"},
	{"marks out of order", "54'06°N 7°54'E", "out of order"},
	{"seconds without minutes", `54°30"N 7°30"E`, "out of order"},
	{"mark without number", "°54N 7E", "must follow a number"},
	{"point without figures", "54.,7.", "decimal point"},
	{"point in front", ".5,.5", "decimal point"},
	{"two points", "54.1.2,7.9", "decimal point"},

	{"NaN", "NaN,NaN", `"NaN"`},
	{"infinity", "Inf,7", `"Inf"`},
	{"exponent", "5.4e1,7.9", "once each"},
	{"exponents", "5e1,7e0", "both before or both after"},
	{"hexadecimal", "0x36,0x7", `"x"`},
	{"underscore", "5_4,7", "does not belong"},
	{"other digits", "٥٤,٧", "does not belong"},
	{"control character", "54\x00,7", "does not belong"},
	{"broken UTF-8", "54\xff,7", "does not belong"},
	{"broken UTF-8 behind a point", "0.\xb5", "decimal point"}, // the message repeated the broken byte
	{"too many digits", strings.Repeat("1", 50) + ",7", "too many digits"},
	{"10 kB of letters", strings.Repeat("N", 10_000), "too long"},
	{"10 kB of figures", strings.Repeat("9", 10_000), "too long"},
	{"10 kB of marks", strings.Repeat("°", 5_000), "too long"},

	{"geo with a query", "geo:0,0?q=54.1,7.9", "query"},
	{"geo on another datum", "geo:54.1,7.9;crs=nad27", "WGS 84"},
	{"geo, exponent", "geo:5e1,7", "latitude: not a decimal number"},
	{"geo, half", "geo:54.1", "latitude, longitude"},
	{"geo, beyond", "geo:91,7", "beyond 90"},
	{"geo, NaN", "geo:NaN,7", "not a decimal number"},
	{"geo, plus", "geo:54,+7", "not a decimal number"},
}

func TestParsePositionRefuses(t *testing.T) {
	for _, tc := range badPositions {
		got, err := ParsePosition(tc.in)
		if err == nil {
			t.Errorf("%s: ParsePosition(%.40q) = %v, want an error", tc.name, tc.in, got)
			continue
		}
		checkParseError(t, err, ErrPosition)
		if !strings.Contains(err.Error(), tc.says) {
			t.Errorf("%s: ParsePosition(%.40q): %v\nwant it to say %q", tc.name, tc.in, err, tc.says)
		}
	}
}

// checkParseError checks what every error of a parser promises.
func checkParseError(t testing.TB, err error, kinds ...error) {
	t.Helper()
	var pe *ParseError
	if !errors.As(err, &pe) {
		t.Fatalf("%T %v is no *ParseError", err, err)
	}
	known := false
	for _, kind := range kinds {
		known = known || errors.Is(err, kind)
	}
	if !known {
		t.Errorf("%v wraps none of %v", err, kinds)
	}
	text := err.Error()
	// A screen must hold it: about eight lines of fifty.
	if len(text) > 500 || !utf8.ValidString(text) || strings.ContainsAny(text, "\n\x00") {
		t.Errorf("message is not fit for a screen: %q", text)
	}
	if pe.Problem == "" || pe.Expected == "" || !strings.Contains(text, "expected") {
		t.Errorf("message does not say what is wrong and what was expected: %q", text)
	}
}

func TestParsePositionMessage(t *testing.T) {
	_, err := ParsePosition("54 60.0N 7 54.0E")
	const want = `not a position: "54 60.0N 7 54.0E": latitude: minutes 60.0 must be less than 60; ` +
		`expected a form like 54.1,7.9 or 54 06.00N 007 54.00E or 54°06'00"N 7°54'00"E`
	if err == nil || err.Error() != want {
		t.Errorf("got  %v\nwant %s", err, want)
	}
}

func FuzzParsePosition(f *testing.F) {
	for _, tc := range goodPositions {
		f.Add(tc.in)
	}
	for _, tc := range badPositions {
		f.Add(clip(tc.in, 300))
	}
	f.Fuzz(func(t *testing.T, in string) {
		p, err := ParsePosition(in)
		if err != nil {
			if p != (Position{}) {
				t.Errorf("an error and a position: %v", p)
			}
			checkParseError(t, err, ErrPosition)
			return
		}
		if err := p.Validate(); err != nil {
			t.Fatalf("ParsePosition(%q): %v", in, err)
		}
		again, err := ParsePosition(FormatDM(p, 9))
		if err != nil {
			t.Fatalf("what was printed is not read: %v", err)
		}
		checkClose(t, p, again, 0.5e-9/60)
	})
}

func BenchmarkParsePosition(b *testing.B) {
	for b.Loop() {
		if _, err := ParsePosition("54°06.000'N 007°54.000'E"); err != nil {
			b.Fatal(err)
		}
	}
}
