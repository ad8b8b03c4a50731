package nav

import (
	"math"
	"strings"
	"testing"

	"pgregory.net/rapid"
)

func TestFormatPosition(t *testing.T) {
	dm := func(n int) func(Position) string { return func(p Position) string { return FormatDM(p, n) } }
	dms := func(n int) func(Position) string { return func(p Position) string { return FormatDMS(p, n) } }
	deg := func(n int) func(Position) string { return func(p Position) string { return FormatDegrees(p, n) } }
	tests := []struct {
		name     string
		lat, lon float64
		form     func(Position) string
		want     string
	}{
		{"String", 54.1, 7.9, Position.String, "54°06.000'N 007°54.000'E"},
		{"south and west", -33.858333, -151.215, Position.String, "33°51.500'S 151°12.900'W"},
		{"no decimals", 54.1, 7.9, dm(0), "54°06'N 007°54'E"},
		{"carry into the degree", 54 + 59.9996/60, 7 + 59.9994/60, dm(3), "55°00.000'N 007°59.999'E"},
		{"carry of whole minutes", 54 + 59.5/60, -(9 + 59.7/60), dm(0), "55°00'N 010°00'W"},
		{"carry to the pole", 89.9999999, 0, dm(3), "90°00.000'N 000°00.000'E"},
		{"carry to the antimeridian", 0, 179.9999999, dm(3), "00°00.000'N 180°00.000'E"},
		{"antimeridian", -17, 180, dm(3), "17°00.000'S 180°00.000'W"},
		{"no south zero", -1e-9, -1e-9, dm(3), "00°00.000'N 000°00.000'E"},
		{"poles", -90, 0, dm(1), "90°00.0'S 000°00.0'E"},
		{"seconds", 54.1, 7.9, dms(1), `54°06'00.0"N 007°54'00.0"E`},
		{"seconds, none", -33.8583333, 151.215, dms(0), `33°51'30"S 151°12'54"E`},
		{"seconds carry through both", 54.99999999, 9.9999, dms(0), `55°00'00"N 010°00'00"E`},
		{"degrees", 54.1, -7.9, deg(5), "54.10000,-7.90000"},
		{"degrees, no minus zero", -1e-7, -1e-7, deg(5), "0.00000,0.00000"},
		{"degrees, none", 54.6, 7.4, deg(0), "55,7"},
		{"decimals below the range", 54.1, 7.9, dm(-3), "54°06'N 007°54'E"},
		{"decimals above the range", 54.1, 7.9, dm(99), "54°06.000000000'N 007°54.000000000'E"},
		{"not a number", math.NaN(), 0, Position.String, "no position"},
		{"not a number, degrees", 0, math.NaN(), deg(3), "no position"},
		{"beyond the pole", 91, 0, dms(0), "no position"},
	}
	for _, tc := range tests {
		if got := tc.form(PositionFromDegrees(tc.lat, tc.lon)); got != tc.want {
			t.Errorf("%s: (%v, %v) = %s, want %s", tc.name, tc.lat, tc.lon, got, tc.want)
		}
	}
}

// drawPosition draws over the whole earth, often at a pole, on the equator or
// the antimeridian, or where a rounding carries.
func drawPosition(t *rapid.T) Position {
	special := func(limit float64, label string) float64 {
		whole := float64(rapid.IntRange(-int(limit), int(limit)).Draw(t, label+" whole"))
		tiny := rapid.Float64Range(-1e-6, 1e-6).Draw(t, label+" beside")
		return math.Min(math.Max(whole+tiny, -limit), limit)
	}
	lat := rapid.OneOf(rapid.Float64Range(-90, 90), rapid.SampledFrom([]float64{-90, 0, 90})).Draw(t, "lat")
	lon := rapid.OneOf(rapid.Float64Range(-180, 180), rapid.SampledFrom([]float64{-180, 0, 180})).Draw(t, "lon")
	if rapid.Bool().Draw(t, "near whole degrees") {
		lat, lon = special(90, "lat"), special(180, "lon")
	}
	return PositionFromDegrees(lat, lon)
}

// checkClose compares within half a printed step. Binary fractions of printed
// decimals and radians add a few ulps of 180 degrees, 2.8e-14 each.
func checkClose(t interface {
	Helper()
	Fatalf(string, ...any)
}, a, b Position, halfStepDeg float64) {
	t.Helper()
	tol := halfStepDeg + 2e-13
	dLat := math.Abs(a.LatDeg() - b.LatDeg())
	dLon := math.Abs(NormSignedDeg(a.LonDeg() - b.LonDeg()))
	if dLat > tol || dLon > tol {
		t.Fatalf("%v %v and %v %v differ by %v, %v degrees, want at most %v",
			a.LatDeg(), a.LonDeg(), b.LatDeg(), b.LonDeg(), dLat, dLon, tol)
	}
}

func TestPrintThenParse(t *testing.T) {
	forms := []struct {
		name    string
		print   func(Position, int) string
		perUnit float64 // how many of the rounded unit make a degree
	}{
		{"degrees and minutes", FormatDM, 60},
		{"degrees, minutes and seconds", FormatDMS, 3600},
		{"degrees", FormatDegrees, 1},
		{"letters in front", func(p Position, n int) string { return lettersInFront(FormatDM(p, n)) }, 60},
		{"spaces for marks", func(p Position, n int) string { return spacesForMarks(FormatDMS(p, n)) }, 3600},
		{"run together", func(p Position, n int) string { return strings.NewReplacer("°", "", "'", "").Replace(FormatDM(p, n)) }, 60},
		{"decimal commas", func(p Position, n int) string { return strings.ReplaceAll(FormatDM(p, n), ".", ",") }, 60},
		{"longitude first", func(p Position, n int) string {
			lat, lon, _ := strings.Cut(FormatDM(p, n), " ")
			return lon + " " + lat
		}, 60},
		{"hyphens", func(p Position, n int) string { return strings.NewReplacer("°", "-", "'", "").Replace(FormatDM(p, n)) }, 60},
		{"as in NMEA 0183", asInNMEA, 60},
	}
	for _, form := range forms {
		t.Run(form.name, func(t *testing.T) {
			rapid.Check(t, func(t *rapid.T) {
				p := drawPosition(t)
				decimals := rapid.IntRange(0, maxDecimals).Draw(t, "decimals")
				text := form.print(p, decimals)
				if strings.Contains(text, "60.") || strings.Contains(text, "60'") || strings.Contains(text, `60"`) {
					if form.perUnit > 1 && carries60(text) {
						t.Fatalf("60 is printed: %s", text)
					}
				}
				got, err := ParsePosition(text)
				if err != nil {
					t.Fatalf("ParsePosition(%s): %v", text, err)
				}
				checkClose(t, p, got, 0.5/form.perUnit/math.Pow10(decimals))
			})
		})
	}
}

// carries60 reports minutes or seconds of 60 behind a mark: 60 degrees are
// none.
func carries60(text string) bool {
	return strings.Contains(text, "°60") || strings.Contains(text, "'60")
}

func lettersInFront(text string) string {
	var out []string
	for half := range strings.SplitSeq(text, " ") {
		out = append(out, half[len(half)-1:]+half[:len(half)-1])
	}
	return strings.Join(out, " ")
}

func spacesForMarks(text string) string {
	return strings.NewReplacer("°", " ", "'", " ", `"`, "").Replace(text)
}

// asInNMEA writes 5406.00,N,00754.00,E.
func asInNMEA(p Position, decimals int) string {
	text := strings.NewReplacer("°", "", "'", ",").Replace(FormatDM(p, decimals))
	return strings.ReplaceAll(text, " ", ",")
}

func TestSpoken(t *testing.T) {
	tests := []struct {
		lat, lon float64
		want     string
	}{
		{54.1, 7.9, "five four degrees, zero six decimal zero zero minutes, North|" +
			"zero zero seven degrees, five four decimal zero zero minutes, East"},
		{-33.8583333, -151.215, "three three degrees, five one decimal five zero minutes, South|" +
			"one five one degrees, one two decimal nine zero minutes, West"},
		{50 + 59.9999/60, 0, "five one degrees, zero zero decimal zero zero minutes, North|" +
			"zero zero zero degrees, zero zero decimal zero zero minutes, East"},
		{math.NaN(), 0, "no position"},
	}
	for _, tc := range tests {
		if got := strings.Join(Spoken(PositionFromDegrees(tc.lat, tc.lon)), "|"); got != tc.want {
			t.Errorf("Spoken(%v, %v) = %s, want %s", tc.lat, tc.lon, got, tc.want)
		}
	}
}

// TestSpokenSaysWhatIsPrinted reads the words back as figures.
func TestSpokenSaysWhatIsPrinted(t *testing.T) {
	figures := strings.NewReplacer("zero", "0", "one", "1", "two", "2", "three", "3", "four", "4",
		"five", "5", "six", "6", "seven", "7", "eight", "8", "nine", "9", "decimal", ".")
	rapid.Check(t, func(t *rapid.T) {
		p := drawPosition(t)
		var text strings.Builder
		for _, line := range Spoken(p) {
			parts := strings.Split(line, ", ")
			for i, unit := range []string{" degrees", " minutes"} {
				spoken, found := strings.CutSuffix(parts[i], unit)
				if !found {
					t.Fatalf("%q does not end in %q", parts[i], unit)
				}
				text.WriteString(strings.ReplaceAll(figures.Replace(spoken), " ", "") + " ")
			}
			text.WriteString(parts[2] + " ")
		}
		got, err := ParsePosition(text.String())
		if err != nil {
			t.Fatal(err)
		}
		checkClose(t, p, got, 0.5/60/100)
	})
}
