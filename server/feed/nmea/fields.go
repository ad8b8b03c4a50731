package nmea

import (
	"strings"

	"wakeback/drift/nav"
)

// fields reads the fields of one sentence in order and keeps the first error,
// so that a decoder is one struct literal. After an error all reads give
// absent values. Fields that a shorter, older form of a sentence does not have
// read as empty.
type fields struct {
	formatter string
	rest      string
	more      bool
	err       error
}

func newFields(s Sentence) fields {
	return fields{formatter: s.Formatter, rest: s.Data, more: true}
}

// next returns the next field, "" after the last.
func (f *fields) next() string {
	if !f.more {
		return ""
	}
	i := strings.IndexByte(f.rest, ',')
	if i < 0 {
		f.more = false
		return f.rest
	}
	field := f.rest[:i]
	f.rest = f.rest[i+1:]
	return field
}

func (f *fields) fail(field, value, want string) {
	if f.err == nil {
		f.err = &FieldError{Formatter: f.formatter, Field: field, Value: clip(value), Want: want}
	}
}

// need refuses a sentence with fewer than n fields.
func (f *fields) need(s Sentence, n int) {
	if have := 1 + strings.Count(s.Data, ","); have < n {
		f.fail("the number of fields", itoa(have), itoa(n)+" or more")
	}
}

func itoa(n int) string {
	if n < 10 {
		return string(rune('0' + n))
	}
	return itoa(n/10) + string(rune('0'+n%10))
}

// number reads a decimal number between lo and hi.
func (f *fields) number(field string, lo, hi float64, want string) nav.Opt[float64] {
	s := f.next()
	if s == "" {
		return nav.None[float64]()
	}
	v, ok := parseDecimal(s)
	if !ok || v < lo || v > hi {
		f.fail(field, s, want)
		return nav.None[float64]()
	}
	return nav.Some(v)
}

// direction reads 0 to 360 degrees; 360 is 0.
func (f *fields) direction(field string) nav.Opt[float64] {
	v := f.number(field, 0, 360, "0 to 360 degrees")
	if d, ok := v.Get(); ok && d == 360 {
		return nav.Some(0.0)
	}
	return v
}

func (f *fields) trueDeg(field string) nav.Opt[nav.TrueDeg] {
	v, ok := f.direction(field).Get()
	return opt(nav.TrueDeg(v), ok)
}

func (f *fields) magDeg(field string) nav.Opt[nav.MagneticDeg] {
	v, ok := f.direction(field).Get()
	return opt(nav.MagneticDeg(v), ok)
}

// fastestSpeed bounds speeds of vessel, wind and water, in any unit that a
// sentence may use. Our choice, because nothing afloat and no wind comes near
// it, so that a larger number is a fault of the talker.
const fastestSpeed = 2000

func (f *fields) speed(field string) nav.Opt[float64] {
	return f.number(field, 0, fastestSpeed, "a speed, 0 or more")
}

// signedSpeed reads a speed that is negative astern or to port.
func (f *fields) signedSpeed(field string) nav.Opt[float64] {
	return f.number(field, -fastestSpeed, fastestSpeed, "a speed")
}

// letter reads a one-letter field that must be one of set when it is there.
// It returns 0 when the field is empty.
func (f *fields) letter(field, set string) byte {
	s := f.next()
	if s == "" {
		return 0
	}
	if len(s) != 1 || strings.IndexByte(set, s[0]) < 0 {
		f.fail(field, s, "one of "+set)
		return 0
	}
	return s[0]
}

// unit reads the letter that belongs to the value before it. A value whose
// letter is missing is refused: without it nobody knows what the number is.
func (f *fields) unit(field, set string, has bool) byte {
	c := f.letter(field, set)
	if has && c == 0 && f.err == nil {
		f.fail(field, "", "one of "+set)
	}
	return c
}

// position reads latitude, N or S, longitude, E or W.
func (f *fields) position() nav.Opt[nav.Position] {
	lat, okLat := f.coordinate("latitude", "ddmm.mm, 0000 to 9000", 2, 90, "NS")
	lon, okLon := f.coordinate("longitude", "dddmm.mm, 00000 to 18000", 3, 180, "EW")
	if okLat != okLon {
		f.fail("position", "half a position", "both latitude and longitude, or neither")
	}
	if f.err != nil || !okLat || !okLon {
		return nav.None[nav.Position]()
	}
	return nav.Some(nav.PositionFromDegrees(lat, lon))
}

// coordinate reads one coordinate and its hemisphere; the second letter of
// hemispheres is the negative one.
func (f *fields) coordinate(field, want string, degreeDigits int, most float64, hemispheres string) (float64, bool) {
	s := f.next()
	h := f.unit("hemisphere letter", hemispheres, s != "")
	if s == "" {
		if h != 0 {
			f.fail(field, s, want)
		}
		return 0, false
	}
	v, ok := parseCoordinate(s, degreeDigits)
	if !ok || v > most {
		f.fail(field, s, want)
		return 0, false
	}
	if h == hemispheres[1] {
		v = -v
	}
	return v, true
}

// eastPositive reads an angle and its E or W; east is positive.
func (f *fields) eastPositive(field string) nav.Opt[float64] {
	v, has := f.number(field, 0, 180, "0 to 180 degrees").Get()
	if f.unit("E or W after an angle", "EW", has) == 'W' {
		v = -v
	}
	return opt(v, has && f.err == nil)
}

func (f *fields) timeOfDay(field string) nav.Opt[TimeOfDay] {
	s := f.next()
	if s == "" {
		return nav.None[TimeOfDay]()
	}
	t, ok := parseTimeOfDay(s)
	if !ok {
		f.fail(field, s, "hhmmss or hhmmss.ss")
	}
	return opt(t, ok)
}

func (f *fields) date(field string) nav.Opt[Date] {
	s := f.next()
	if s == "" {
		return nav.None[Date]()
	}
	d, ok := parseDate(s)
	if !ok {
		f.fail(field, s, "ddmmyy, a day of the calendar")
	}
	return opt(d, ok)
}

// count reads a whole number from 0 to most.
func (f *fields) count(field string, most int) nav.Opt[int] {
	s := f.next()
	if s == "" {
		return nav.None[int]()
	}
	v, ok := parseDigits(s)
	if !ok || v > most {
		f.fail(field, s, "a whole number up to "+itoa(most))
	}
	return opt(v, ok && v <= most)
}

// knots reads a speed in knots with its N and the same in km/h with its K, and
// returns knots: the first where it is there, else the second turned.
func (f *fields) knots(field string) nav.Opt[float64] {
	kn := f.speed(field)
	f.unit("N after a speed", "N", kn.IsSet())
	kmh := f.speed("speed in km/h")
	f.unit("K after a speed", "K", kmh.IsSet())
	if v, ok := kmh.Get(); ok && !kn.IsSet() {
		return nav.Some(v * 1000 / nav.MetresPerNM)
	}
	return kn
}

func opt[T any](v T, has bool) nav.Opt[T] {
	if !has {
		return nav.None[T]()
	}
	return nav.Some(v)
}
