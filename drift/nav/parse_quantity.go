package nav

import (
	"strconv"
	"strings"
	"time"
)

// What an error shows as the expected form.
const (
	directionForms = "degrees from 0 to 360 like 283 or 283T"
	magneticForms  = "degrees from 0 to 360 like 283, 283T or, magnetic, 283M"
	dirSpeedForms  = "degrees true and knots like 240/15"
	speedForms     = "knots like 6.5 or 6.5kn"
	rangeForms     = "nautical miles like 0.5 or 0.5nm"
	timeForms      = "date, time and zone like 2026-05-04T14:30:00Z or 2026-05-04T16:30:00+02:00"
)

// ParseDirection reads a true direction: 283, 283.5, 283°, 283T. 360 is north.
// A magnetic direction (283M) is refused, because it needs a variation: see
// [ParseDirectionWith]. The error is a [*ParseError] that wraps [ErrDirection].
func ParseDirection(s string) (TrueDeg, error) {
	return parseDirection(s, None[VariationDeg](), directionForms)
}

// ParseDirectionWith is [ParseDirection] where the variation is known, so that
// a magnetic direction can be made true. A figure without a letter is true.
func ParseDirectionWith(s string, v VariationDeg) (TrueDeg, error) {
	return parseDirection(s, Some(v), magneticForms)
}

func parseDirection(s string, variation Opt[VariationDeg], forms string) (TrueDeg, error) {
	fail := func(problem string) (TrueDeg, error) {
		return 0, parseError(ErrDirection, s, "", problem, forms)
	}
	if len(s) > maxTyped {
		return fail("too long to be a direction")
	}
	figures, unit := splitUnit(s)
	unit = strings.TrimSpace(strings.TrimPrefix(unit, "°"))
	deg, problem := readNumber(figures, 360)
	if problem != "" {
		return fail(problem)
	}
	switch unit {
	case "", "T", "t":
		return True(deg), nil
	case "M", "m":
		v, known := variation.Get()
		if !known {
			return fail("a magnetic direction is not taken here: give it true")
		}
		return MagneticDeg(NormDeg(deg)).True(v), nil
	}
	return fail(strconv.Quote(clip(unit, 20)) + " behind the figures is not understood")
}

// ParseDirSpeed reads a direction and a speed, as of wind (from) or current
// (towards): 240/15 is 240 degrees true, 15 knots. The error is a
// [*ParseError]; it wraps [ErrDirection] or [ErrSpeed] as to what is wrong.
func ParseDirSpeed(s string) (dir TrueDeg, speedKn float64, err error) {
	if len(s) > maxTyped {
		return 0, 0, parseError(ErrDirection, s, "", "too long to be a direction and a speed", dirSpeedForms)
	}
	before, after, found := strings.Cut(s, "/")
	if !found {
		return 0, 0, parseError(ErrDirection, s, "", "there is no / between a direction and a speed", dirSpeedForms)
	}
	dir, err = ParseDirection(before)
	if err == nil {
		speedKn, err = ParseSpeedKn(after)
	}
	if e, ok := err.(*ParseError); ok {
		part := "speed"
		if e.Kind == ErrDirection {
			part = "direction"
		}
		return 0, 0, parseError(e.Kind, s, part, e.Problem, dirSpeedForms)
	}
	return dir, speedKn, err
}

// maxSpeedKn bounds a typed speed. Our choice, because it is above any wind at
// sea, and a slip of the finger (1500 for 15.00) is above it.
const maxSpeedKn = 250

// ParseSpeedKn reads a speed in knots, 0 to 250: 6, 6.5, 6.5kn, 6.5 kt,
// 6.5 knots. Other units are refused. The error is a [*ParseError] that wraps
// [ErrSpeed].
func ParseSpeedKn(s string) (float64, error) {
	return parseUnit(s, ErrSpeed, maxSpeedKn, speedForms, "kn", "kt", "kts", "knot", "knots")
}

// maxRangeNM bounds a typed range: half way round the earth. Half a WGS 84
// meridian is 20,003,931 m, half the equator 20,037,508 m, or 10,819.4 miles.
const maxRangeNM = 10820

// ParseRangeNM reads a range in nautical miles, 0 to 10,820: 0.5, 0.5nm,
// 0.5 NM. "M" and "m" are refused, because one means miles on a chart and the
// other metres. The error is a [*ParseError] that wraps [ErrRange].
func ParseRangeNM(s string) (float64, error) {
	return parseUnit(s, ErrRange, maxRangeNM, rangeForms, "nm", "nmi")
}

// parseUnit reads a number with one of the units, or with none.
func parseUnit(s string, kind error, limit float64, forms string, units ...string) (float64, error) {
	if len(s) > maxTyped {
		return 0, parseError(kind, s, "", "too long to be a number", forms)
	}
	figures, unit := splitUnit(s)
	v, problem := readNumber(figures, limit)
	if problem != "" {
		return 0, parseError(kind, s, "", problem, forms)
	}
	if unit == "" {
		return v, nil
	}
	for _, u := range units {
		if strings.EqualFold(unit, u) {
			return v, nil
		}
	}
	return 0, parseError(kind, s, "unit", strconv.Quote(clip(unit, 20))+" is not taken here", forms)
}

// splitUnit cuts trimmed text behind the last character that may belong to a
// number, so that "283°T" gives "283" and "°T".
func splitUnit(s string) (figures, unit string) {
	s = strings.TrimFunc(s, isSpace)
	end := 0
	for end < len(s) && (isDigit(rune(s[end])) || strings.IndexByte("+-.,", s[end]) >= 0) {
		end++
	}
	return s[:end], strings.TrimFunc(s[end:], isSpace)
}

// readNumber reads a decimal number from 0 to limit.
func readNumber(s string, limit float64) (float64, string) {
	switch {
	case s == "":
		return 0, "there are no figures at the front"
	case strings.ContainsAny(s, "+-"):
		return 0, "a sign is not taken here"
	case strings.Contains(s, ","):
		return 0, "write a point as the decimal mark"
	}
	v, ok := parseDecimal(s)
	if !ok {
		return 0, clip(s, 20) + " is not a decimal number"
	}
	if v > limit {
		return 0, clip(s, 20) + " is more than " + strconv.FormatFloat(limit, 'f', -1, 64)
	}
	return v, ""
}

// ParseTime reads an RFC 3339 time and returns it in UTC. A time without a
// zone is refused, because it may be ship's time or UTC. The error is a
// [*ParseError] that wraps [ErrTime].
func ParseTime(s string) (time.Time, error) {
	text := strings.ToUpper(strings.TrimFunc(clip(s, maxTyped), isSpace))
	if problem := timeProblem(text); problem != "" {
		return time.Time{}, parseError(ErrTime, s, "", problem, timeForms)
	}
	t, err := time.Parse(time.RFC3339, text)
	if err != nil {
		return time.Time{}, parseError(ErrTime, s, "", "there is no such date, time or zone", timeForms)
	}
	return t.UTC(), nil
}

// timeProblem checks the form figure by figure: [time.Parse] alone takes some
// that RFC 3339 does not have, such as an hour of one figure.
func timeProblem(s string) string {
	const form = "0000-00-00T00:00:00"
	switch {
	case s == "":
		return "nothing was given"
	case !fitsForm(s, form[:10]):
		return "the date must be year, month and day like 2026-05-04"
	case len(s) == 10:
		return "there is no time of day"
	case !fitsForm(s, form):
		return "behind the date there must be T and hours, minutes and seconds"
	}
	zone := s[len(form):]
	if strings.HasPrefix(zone, ".") {
		end := 1
		for end < len(zone) && isDigit(rune(zone[end])) {
			end++
		}
		if end == 1 {
			return "there are no figures behind the decimal point"
		}
		zone = zone[end:]
	}
	switch {
	case zone == "":
		return "there is no zone, so it may be ship's time or UTC"
	case zone == "Z":
		return ""
	case len(zone) == 6 && (fitsForm(zone, "+00:00") || fitsForm(zone, "-00:00")):
		return ""
	}
	return "the zone must be Z, or a sign, hours and minutes like +02:00"
}

// fitsForm reports whether s begins like form, where 0 stands for any digit.
func fitsForm(s, form string) bool {
	if len(s) < len(form) {
		return false
	}
	for i := range len(form) {
		if form[i] == '0' && isDigit(rune(s[i])) {
			continue
		}
		if form[i] == '0' || s[i] != form[i] {
			return false
		}
	}
	return true
}
