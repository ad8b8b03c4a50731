package nav

import (
	"math"
	"strconv"
	"strings"
)

// Figures is the direction in three figures: 007, 283. 359.6 is 000. What is
// not a number prints as "---".
func (t TrueDeg) Figures() string { return threeFigures(float64(t)) }

// String is the direction in three figures with T for true: 283T.
func (t TrueDeg) String() string { return t.Figures() + "T" }

// Figures is the direction in three figures: 007, 283.
func (m MagneticDeg) Figures() string { return threeFigures(float64(m)) }

// String is the direction in three figures with M for magnetic: 283M.
func (m MagneticDeg) String() string { return m.Figures() + "M" }

func threeFigures(deg float64) string {
	deg = NormDeg(deg)
	if math.IsNaN(deg) {
		return "---"
	}
	return string(appendPadded(nil, int64(math.Round(deg))%360, 3))
}

// Limits of the words for a range, all our choice.
const (
	// Below a fifth of a mile (370 m) the range is in metres, because there a
	// step of 0.01 mile is more than a twentieth of it.
	metresBelowM = 0.2 * MetresPerNM
	// From 100 m on, metres go in tens: the fix is no better.
	tensFromM = 100
)

// WordsRange is a range in metres for a screen or a voice: whole metres below
// 100 m, tens of metres below 0.2 nautical mile, then miles with two decimals,
// from 10 miles with one, from 100 with none: "84 m", "220 m", "0.42 nm",
// "12.5 nm". A negative range or one that is not a number is "range unknown".
func WordsRange(rangeM float64) string {
	if math.IsNaN(rangeM) || math.IsInf(rangeM, 0) || rangeM < 0 {
		return "range unknown"
	}
	if rangeM < metresBelowM {
		whole := math.Round(rangeM)
		if whole >= tensFromM {
			whole = math.Round(rangeM/10) * 10
		}
		return strconv.FormatFloat(whole, 'f', 0, 64) + " m"
	}
	nm := rangeM / MetresPerNM
	decimals := 2
	// The limits leave room for rounding up: 9.996 is "10.0", not "10.00".
	if nm >= 9.995 {
		decimals = 1
	}
	if nm >= 99.95 {
		decimals = 0
	}
	return strconv.FormatFloat(nm, 'f', decimals, 64) + " nm"
}

// relativeStepDeg is the step in which WordsRelative speaks. Our choice,
// because a person points by eye and a vessel yaws by about as much.
const relativeStepDeg = 5

// WordsRelative says where something is as seen from the bow: "dead ahead",
// "40 degrees to port", "150 degrees to starboard", "astern", rounded to 5
// degrees. What is not a number is "direction unknown".
func WordsRelative(r RelativeDeg) string {
	deg := NormSignedDeg(float64(r))
	if math.IsNaN(deg) {
		return "direction unknown"
	}
	rounded := int(math.Round(math.Abs(deg)/relativeStepDeg)) * relativeStepDeg
	switch {
	case rounded == 0:
		return "dead ahead"
	case rounded == 180:
		return "astern"
	case deg < 0:
		return strconv.Itoa(rounded) + " degrees to port"
	}
	return strconv.Itoa(rounded) + " degrees to starboard"
}

// spokenDecimals is the number of decimals of a minute that are spoken. Our
// choice, because 0.01 minute is 19 m, less than the error of a spoken
// position that drifts, and each further figure is one more to mishear.
const spokenDecimals = 2

// Spoken is the position for the radio, one line for the latitude and one for
// the longitude, figure by figure (common practice: degrees and minutes, with
// decimals if needed, north or south, east or west, each figure by itself):
//
//	five four degrees, zero six decimal zero zero minutes, North
//	zero zero seven degrees, five four decimal zero zero minutes, East
//
// For what is no position there is one line, "no position".
func Spoken(p Position) []string {
	if p.Validate() != nil {
		return []string{noPosition}
	}
	return []string{
		spokenCoordinate(p.LatDeg(), 2, "North", "South"),
		spokenCoordinate(p.LonDeg(), 3, "East", "West"),
	}
}

func spokenCoordinate(deg float64, width int, positive, negative string) string {
	figures, isNegative := appendDM(nil, deg, width, spokenDecimals)
	degrees, minutes, _ := strings.Cut(strings.TrimSuffix(string(figures), "'"), "°")
	side := positive
	if isNegative {
		side = negative
	}
	return SpokenFigures(degrees) + " degrees, " + SpokenFigures(minutes) + " minutes, " + side
}

// SpokenFigures puts figures into words one by one, for a bearing or a time on
// the radio: "283" is "two eight three", "6.5" is "six decimal five" (common
// practice). Other characters are left out.
func SpokenFigures(figures string) string {
	words := [...]string{"zero", "one", "two", "three", "four", "five", "six", "seven", "eight", "nine"}
	var b strings.Builder
	for _, r := range figures {
		word := "decimal"
		switch {
		case isDigit(r):
			word = words[r-'0']
		case r != '.':
			continue
		}
		if b.Len() > 0 {
			b.WriteByte(' ')
		}
		b.WriteString(word)
	}
	return b.String()
}
