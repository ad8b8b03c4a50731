package nav

import "strings"

// positionForms is what an error shows as the expected form.
const positionForms = `a form like 54.1,7.9 or 54 06.00N 007 54.00E or 54°06'00"N 7°54'00"E`

// ParsePosition reads a position as people at sea write it:
//
//   - decimal degrees, latitude first, south and west negative: 54.1,7.9 or
//     -33.858, 151.215 or 54.1 7.9 or geo:54.1,7.9 (RFC 5870)
//   - with letters, before or after the figures, in decimal degrees, degrees
//     and minutes, or degrees, minutes and seconds: 54.1N 7.9E,
//     54 06.00N 007 54.00E, 54°06.0'N 7°54'E, S33 51.5 E151 12.9,
//     54-06.0N 007-54.0E, 54:06:00N 7:54:00E. The letters may say that the
//     longitude comes first.
//   - run together: 5406.00N 00754.00E, 5406.00,N,00754.00,E,
//     540600N 0075400E; two figures for degrees of latitude, three for degrees
//     of longitude, nothing less
//   - with the words lat and lon before the figures, in either order
//
// Refused, because more than one reading is a position or a half of one is
// missing: minutes without a letter or sign for each hemisphere, a decimal
// comma without a degree, minute or second mark behind it, whole degrees apart
// by white space only, the letter O. Refused as wrong: a sign together with a
// letter, minutes or seconds of 60 or more, a fraction anywhere but at the
// end, latitude beyond 90, longitude beyond 180, exponents, hexadecimal, NaN.
//
// Longitude 180 east and west are one meridian, returned as -180. The error is
// a [*ParseError] that wraps [ErrPosition].
func ParsePosition(s string) (Position, error) {
	latDeg, lonDeg, part, problem := readPosition(s)
	if problem != "" {
		return Position{}, parseError(ErrPosition, s, part, problem, positionForms)
	}
	return PositionFromDegrees(latDeg, lonDeg), nil
}

// readPosition returns degrees, or the part that is wrong and what is wrong.
func readPosition(s string) (latDeg, lonDeg float64, part, problem string) {
	if len(s) > maxTyped {
		return 0, 0, "", "too long to be a position"
	}
	if rest, ok := cutPrefixFold(strings.TrimSpace(s), "geo:"); ok {
		return readGeoURI(rest)
	}
	toks, problem := scanPosition(s)
	if problem != "" {
		return 0, 0, "", problem
	}
	first, second, problem := splitCoordinates(toks)
	if problem != "" {
		return 0, 0, "", problem
	}
	a, problem := readCoordinate(first)
	if problem != "" {
		return 0, 0, "first coordinate", problem
	}
	b, problem := readCoordinate(second)
	if problem != "" {
		return 0, 0, "second coordinate", problem
	}
	return combine(a, b)
}

// combine finds out which coordinate is which and turns both into degrees.
func combine(a, b coordinate) (latDeg, lonDeg float64, part, problem string) {
	if a.axis == axisUnknown && b.axis == axisUnknown {
		a.axis, b.axis = axisLat, axisLon
	}
	switch {
	case a.axis == axisUnknown || b.axis == axisUnknown:
		return 0, 0, "", "one coordinate has no letter or name: both need one, or neither"
	case a.axis == b.axis:
		return 0, 0, "", "both coordinates are a " + a.axis.String()
	case a.lettered != b.lettered:
		return 0, 0, "", "one coordinate has a letter and the other has none"
	}
	if a.axis == axisLon {
		a, b = b, a
	}
	bothSigned := a.signed && b.signed
	lat, problem := a.degrees(bothSigned)
	if problem != "" {
		return 0, 0, axisLat.String(), problem
	}
	lon, problem := b.degrees(bothSigned)
	if problem != "" {
		return 0, 0, axisLon.String(), problem
	}
	if a.runTogether() != b.runTogether() {
		// 5406.00N 54.00E: the longitude may have lost its leading zeros.
		return 0, 0, "", "one coordinate has degrees and minutes run together and the other has not"
	}
	return lat, lon, "", ""
}

// readGeoURI reads what follows "geo:" (RFC 5870, section 3.3): latitude,
// longitude and perhaps altitude, with a point for the decimal mark. Altitude
// and uncertainty are checked for form and dropped.
func readGeoURI(s string) (latDeg, lonDeg float64, part, problem string) {
	coords, params, _ := strings.Cut(s, ";")
	if strings.ContainsAny(s, "?#") {
		// A query may hold another position than the one in front of it.
		return 0, 0, "", "a geo address with a query is not understood"
	}
	for param := range strings.SplitSeq(params, ";") {
		name, value, _ := strings.Cut(param, "=")
		if strings.EqualFold(name, "crs") && !strings.EqualFold(value, "wgs84") {
			return 0, 0, "", "a geo address must be in WGS 84, not " + clip(value, 20)
		}
	}
	fields := strings.Split(coords, ",")
	if len(fields) < 2 || len(fields) > 3 {
		return 0, 0, "", "a geo address has latitude, longitude and perhaps altitude"
	}
	var values [3]float64
	for i, field := range fields {
		v, ok := parseDecimal(strings.TrimPrefix(field, "-"))
		if !ok {
			return 0, 0, [3]string{"latitude", "longitude", "altitude"}[i], "not a decimal number: " + clip(field, 20)
		}
		if strings.HasPrefix(field, "-") {
			v = -v
		}
		values[i] = v
	}
	if p := axisLat.beyond(values[0]); p != "" {
		return 0, 0, "latitude", p
	}
	if p := axisLon.beyond(values[1]); p != "" {
		return 0, 0, "longitude", p
	}
	return values[0], values[1], "", ""
}

// cutPrefixFold is strings.CutPrefix for an ASCII prefix in either case.
func cutPrefixFold(s, prefix string) (string, bool) {
	if len(s) < len(prefix) || !strings.EqualFold(s[:len(prefix)], prefix) {
		return s, false
	}
	return s[len(prefix):], true
}
