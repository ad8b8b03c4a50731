package nav

import (
	"math"
	"strconv"
)

// noPosition is printed for what is no position, so that it is never mistaken
// for one.
const noPosition = "no position"

// maxDecimals is the finest step that is printed, of degrees, minutes or
// seconds: 1e-9 degree is 0.1 mm.
const maxDecimals = 9

// String is the position in degrees and decimal minutes with three decimals:
// 54°06.000'N 007°54.000'E. A thousandth of a minute of latitude is 1.9 m.
func (p Position) String() string { return FormatDM(p, 3) }

// FormatDM prints degrees and minutes with the given decimals, 0 to 9, such as
// 54°06.00'N 007°54.00'E for two. Rounding carries into the degrees: minutes
// are never printed as 60. What is no position prints as "no position".
func FormatDM(p Position, decimals int) string {
	return formatPosition(p, decimals, appendDM)
}

// FormatDMS prints degrees, minutes and seconds with the given decimals of a
// second, 0 to 9: 54°06'00.0"N 007°54'00.0"E for one.
func FormatDMS(p Position, decimals int) string {
	return formatPosition(p, decimals, appendDMS)
}

// FormatDegrees prints decimal degrees, latitude first, with the given
// decimals, 0 to 9: 54.10000,7.90000 for five. South and west are negative.
func FormatDegrees(p Position, decimals int) string {
	if p.Validate() != nil {
		return noPosition
	}
	decimals = min(max(decimals, 0), maxDecimals)
	b := appendFixed(make([]byte, 0, 32), clamp(p.LatDeg(), 90), decimals)
	return string(appendFixed(append(b, ','), clamp(p.LonDeg(), 180), decimals))
}

// clamp takes off what [Position.Validate] lets through beyond the limit, so
// that what is printed can be read again.
func clamp(deg, limit float64) float64 { return math.Min(math.Max(deg, -limit), limit) }

// appendFixed writes v with fixed decimals, and zero without a sign.
func appendFixed(b []byte, v float64, decimals int) []byte {
	scale := math.Pow10(decimals)
	if math.Abs(v)*scale < 0.5 {
		v = 0
	}
	return strconv.AppendFloat(b, v, 'f', decimals, 64)
}

// formatPosition prints both coordinates with one of the two forms.
func formatPosition(p Position, decimals int, form func(b []byte, deg float64, width, decimals int) ([]byte, bool)) string {
	if p.Validate() != nil {
		return noPosition
	}
	decimals = min(max(decimals, 0), maxDecimals)
	b, south := form(make([]byte, 0, 48), clamp(p.LatDeg(), 90), 2, decimals)
	b = append(b, hemisphere(south, 'N', 'S'), ' ')
	b, west := form(b, clamp(p.LonDeg(), 180), 3, decimals)
	return string(append(b, hemisphere(west, 'E', 'W')))
}

func hemisphere(negative bool, positiveLetter, negativeLetter byte) byte {
	if negative {
		return negativeLetter
	}
	return positiveLetter
}

// steps rounds an angle to whole steps of 1/perDegree degree, and tells
// whether what is left is negative. Everything after it is whole numbers, so
// that a carry cannot be lost. At most 180 * 3600 * 1e9 = 6.5e14 steps: a
// float64 holds them exactly.
func steps(deg, perDegree float64) (n int64, negative bool) {
	n = int64(math.Round(math.Abs(deg) * perDegree))
	return n, deg < 0 && n != 0
}

func appendDM(b []byte, deg float64, width, decimals int) ([]byte, bool) {
	unit := pow10(decimals)
	n, negative := steps(deg, float64(60*unit))
	b = appendPadded(b, n/(60*unit), width)
	b = append(b, "°"...)
	b = appendMixed(b, n%(60*unit), unit, decimals)
	return append(b, '\''), negative
}

func appendDMS(b []byte, deg float64, width, decimals int) ([]byte, bool) {
	unit := pow10(decimals)
	n, negative := steps(deg, float64(3600*unit))
	b = appendPadded(b, n/(3600*unit), width)
	b = append(b, "°"...)
	b = appendPadded(b, n/(60*unit)%60, 2)
	b = append(b, '\'')
	b = appendMixed(b, n%(60*unit), unit, decimals)
	return append(b, '"'), negative
}

// appendMixed writes n/unit with two figures before the point.
func appendMixed(b []byte, n, unit int64, decimals int) []byte {
	b = appendPadded(b, n/unit, 2)
	if decimals == 0 {
		return b
	}
	return appendPadded(append(b, '.'), n%unit, decimals)
}

// appendPadded writes n with leading zeros.
func appendPadded(b []byte, n int64, width int) []byte {
	for limit := pow10(width - 1); limit > n && limit > 1; limit /= 10 {
		b = append(b, '0')
	}
	return strconv.AppendInt(b, n, 10)
}

func pow10(n int) int64 {
	p := int64(1)
	for ; n > 0; n-- {
		p *= 10
	}
	return p
}
