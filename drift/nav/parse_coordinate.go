package nav

import "strconv"

// axis is which of the two a coordinate is.
type axis uint8

const (
	axisUnknown axis = iota
	axisLat
	axisLon
)

func (a axis) String() string {
	switch a {
	case axisLat:
		return "latitude"
	case axisLon:
		return "longitude"
	}
	return "coordinate"
}

// limitDeg is the largest value on the axis.
func (a axis) limitDeg() float64 {
	if a == axisLat {
		return 90
	}
	return 180
}

// beyond returns a problem when deg lies past the end of the axis.
func (a axis) beyond(deg float64) string {
	limit := a.limitDeg()
	if deg >= -limit && deg <= limit {
		return ""
	}
	return strconv.FormatFloat(deg, 'f', -1, 64) + " degrees is beyond " + strconv.Itoa(int(limit))
}

// coordinate is one half of a typed position before it is worked out.
type coordinate struct {
	axis     axis
	negative bool
	signed   bool // an explicit sign
	lettered bool // N, S, E or W
	parts    []token
	marked   bool // the first part has a degree mark
}

// readCoordinate reads [label] [letter] [sign] figures [letter].
func readCoordinate(toks []token) (coordinate, string) {
	var c coordinate
	if len(toks) > 0 && toks[0].kind == tokLabel {
		c.axis = axisLat
		if toks[0].text == "lon" {
			c.axis = axisLon
		}
		toks = toks[1:]
	}
	toks, problem := c.takeLetter(toks)
	if problem != "" {
		return c, problem
	}
	if len(toks) > 0 && toks[0].isSign() {
		c.signed, c.negative = true, toks[0].kind == tokMinus
		if c.lettered {
			return c, "a sign and a letter together contradict each other: leave one out"
		}
		toks = toks[1:]
	}
	return c, c.takeFigures(toks)
}

// takeLetter takes the hemisphere from the front or the end.
func (c *coordinate) takeLetter(toks []token) ([]token, string) {
	n := len(toks)
	var letter string
	switch {
	case n > 0 && toks[0].kind == tokLetter:
		letter, toks = toks[0].text, toks[1:]
		if len(toks) > 0 && toks[0].kind == tokSeparator { // N,54.1
			toks = toks[1:]
		}
	case n > 0 && toks[n-1].kind == tokLetter:
		letter, toks = toks[n-1].text, toks[:n-1]
	default:
		return toks, ""
	}
	of := axisLat
	if letter == "E" || letter == "W" {
		of = axisLon
	}
	if c.axis != axisUnknown && c.axis != of {
		return toks, "the letter " + letter + " does not belong to a " + c.axis.String()
	}
	c.axis, c.lettered, c.negative = of, true, letter == "S" || letter == "W"
	return toks, ""
}

// takeFigures takes up to three numbers, each with its mark or without, in the
// order degrees, minutes, seconds.
func (c *coordinate) takeFigures(toks []token) string {
	for i := 0; i < len(toks); i++ {
		t := toks[i]
		switch t.kind {
		case tokNumber:
			if len(c.parts) == 3 {
				return "there are more figures than degrees, minutes and seconds"
			}
			c.parts = append(c.parts, t)
		case tokDegree, tokMinute, tokSecond:
			if p := c.takeMark(toks, i); p != "" {
				return p
			}
		case tokJoin: // the scanner makes it between digits only
		case tokSeparator:
			if t.text == "," {
				return problemComma
			}
			return "the separator " + t.text + " stands inside the coordinate"
		default:
			return "a sign, letter or name stands inside the figures"
		}
	}
	if len(c.parts) == 0 {
		return "there are no figures in it"
	}
	return ""
}

// takeMark checks that a mark follows the number it belongs to.
func (c *coordinate) takeMark(toks []token, i int) string {
	names := [...]string{"degree", "minute", "second"}
	want := int(toks[i].kind - tokDegree)
	if i == 0 || toks[i-1].kind != tokNumber {
		return "a " + names[want] + " mark must follow a number"
	}
	if len(c.parts) != want+1 {
		return "the " + names[want] + " mark is out of order: degrees come first, then minutes, then seconds"
	}
	if want == 0 {
		c.marked = true
	}
	return ""
}

// runTogether reports whether degrees and minutes are one number: 5406.00.
func (c coordinate) runTogether() bool {
	return len(c.parts) == 1 && !c.marked && c.parts[0].whole > 3
}

// degrees works the coordinate out. bothSigned tells that each coordinate has
// an explicit sign, which then stands for the letters.
func (c coordinate) degrees(bothSigned bool) (float64, string) {
	parts := c.parts
	if (len(parts) > 1 || c.runTogether()) && !c.lettered && !bothSigned {
		return 0, "which hemisphere: degrees and minutes need a letter, " + c.axis.letters()
	}
	if len(parts) == 1 && !c.marked && (c.lettered || c.runTogether()) {
		split, problem := c.axis.splitRun(parts[0])
		if problem != "" {
			return 0, problem
		}
		parts = split
	}
	deg, problem := sexagesimal(parts)
	if problem != "" {
		return 0, problem
	}
	if problem := c.axis.beyond(deg); problem != "" {
		return 0, problem
	}
	if c.negative {
		deg = -deg
	}
	return deg, ""
}

func (a axis) letters() string {
	if a == axisLat {
		return "N or S"
	}
	return "E or W"
}

// splitRun cuts a number like 5406.00 or 0075400 into its parts. It counts the
// figures before the point and takes only those counts that leave no doubt.
func (a axis) splitRun(t token) ([]token, string) {
	degFigures := int(a) + 1 // two for latitude, three for longitude
	switch t.whole {
	case 1, 2, degFigures:
		return []token{t}, ""
	case degFigures + 2:
		return []token{head(t, 0, degFigures), tail(t, degFigures)}, ""
	case degFigures + 4:
		return []token{head(t, 0, degFigures), head(t, degFigures, degFigures+2), tail(t, degFigures+2)}, ""
	}
	return nil, t.text + " can be read in more than one way: degrees of " + a.String() +
		" have " + [...]string{"two", "three"}[a-1] + " figures, minutes and seconds two each"
}

func head(t token, from, to int) token {
	return token{kind: tokNumber, text: t.text[from:to], whole: to - from}
}

func tail(t token, from int) token {
	return token{kind: tokNumber, text: t.text[from:], whole: t.whole - from, fraction: t.fraction}
}

// sexagesimal adds up degrees, minutes and seconds.
func sexagesimal(parts []token) (float64, string) {
	names := [...]string{"degrees", "minutes", "seconds"}
	units := [...]float64{1, 60, 3600}
	var deg float64
	for i, t := range parts {
		v, ok := parseDecimal(t.text)
		if !ok {
			return 0, t.text + " is not a decimal number"
		}
		if t.fraction && i < len(parts)-1 {
			return 0, names[i] + " " + t.text + " have a fraction, but " + names[i+1] + " follow"
		}
		if i > 0 && t.whole > 2 {
			return 0, names[i] + " " + t.text + " have more than two figures before the point"
		}
		if i > 0 && v >= 60 {
			return 0, names[i] + " " + t.text + " must be less than 60"
		}
		deg += v / units[i]
	}
	return deg, ""
}

// parseDecimal reads digits with at most one decimal point between them, and
// nothing else: no sign, exponent, hexadecimal or underscore.
func parseDecimal(s string) (float64, bool) {
	if s == "" || len(s) > maxDigits+1 || !isDigit(rune(s[0])) || !isDigit(rune(s[len(s)-1])) {
		return 0, false
	}
	points := 0
	for i := range len(s) {
		switch {
		case s[i] == '.':
			points++
		case !isDigit(rune(s[i])):
			return 0, false
		}
	}
	if points > 1 {
		return 0, false
	}
	v, err := strconv.ParseFloat(s, 64)
	return v, err == nil
}
