package nmea

// parseDecimal reads an optional sign, digits and an optional fraction, and
// nothing else: no exponent, no blanks, no "inf" or "nan", which the standard
// library's reader would take. Up to 15 digits the result is the nearest
// float64, because digits and power of ten are then both exact; more are
// refused.
func parseDecimal(s string) (v float64, ok bool) {
	digits, decimals, neg := int64(0), -1, false
	i := 0
	if i < len(s) && (s[i] == '-' || s[i] == '+') {
		neg = s[i] == '-'
		i++
	}
	count := 0
	for ; i < len(s); i++ {
		c := s[i]
		switch {
		case c >= '0' && c <= '9':
			digits = digits*10 + int64(c-'0')
			if count++; count > 15 {
				return 0, false
			}
			if decimals >= 0 {
				decimals++
			}
		case c == '.' && decimals < 0:
			decimals = 0
		default:
			return 0, false
		}
	}
	if count == 0 {
		return 0, false
	}
	v = float64(digits)
	if decimals > 0 {
		v /= pow10[decimals]
	}
	if neg {
		v = -v
	}
	return v, true
}

var pow10 = [...]float64{1, 1e1, 1e2, 1e3, 1e4, 1e5, 1e6, 1e7, 1e8, 1e9, 1e10, 1e11, 1e12, 1e13, 1e14, 1e15}

// parseDigits reads a whole number of decimal digits only.
func parseDigits(s string) (v int, ok bool) {
	if s == "" || len(s) > 9 {
		return 0, false
	}
	for i := 0; i < len(s); i++ {
		if s[i] < '0' || s[i] > '9' {
			return 0, false
		}
		v = v*10 + int(s[i]-'0')
	}
	return v, true
}

// parseCoordinate reads degrees and minutes, as in ddmm.mmmm with two digits of
// degrees or dddmm.mmmm with three. The count of digits before the point is
// fixed by the standard; any other is refused, because one more or less moves
// the position by tens of degrees.
func parseCoordinate(s string, degreeDigits int) (deg float64, ok bool) {
	whole := degreeDigits + 2
	if len(s) < whole || len(s) > whole && s[whole] != '.' {
		return 0, false
	}
	d, ok := parseDigits(s[:degreeDigits])
	if !ok {
		return 0, false
	}
	if c := s[degreeDigits]; c < '0' || c > '9' {
		return 0, false // a sign
	}
	minutes, ok := parseDecimal(s[degreeDigits:])
	if !ok || minutes >= 60 {
		return 0, false
	}
	return float64(d) + minutes/60, true
}
