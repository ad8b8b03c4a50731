package nav

import (
	"errors"
	"strconv"
	"strings"
	"unicode"
	"unicode/utf8"
)

// Each error of a parser in this package wraps one of these, or
// [ErrPosition], and is a [*ParseError].
var (
	ErrDirection = errors.New("not a direction")
	ErrSpeed     = errors.New("not a speed")
	ErrRange     = errors.New("not a range")
	ErrTime      = errors.New("not a time")
)

// ParseError says what is wrong with something a person typed, at which part
// of it, and what would have been understood.
type ParseError struct {
	Kind     error  // ErrPosition, ErrDirection, ErrSpeed, ErrRange or ErrTime
	Input    string // what was typed; a long input is cut
	Part     string // the part that is wrong ("longitude"); empty for the whole
	Problem  string // what is wrong with it
	Expected string // the forms that are understood
}

// Error is one line, fit for a screen.
func (e *ParseError) Error() string {
	s := e.Kind.Error() + ": " + strconv.Quote(e.Input) + ": "
	if e.Part != "" {
		s += e.Part + ": "
	}
	return s + e.Problem + "; expected " + e.Expected
}

// Unwrap returns the kind, for errors.Is.
func (e *ParseError) Unwrap() error { return e.Kind }

// maxTyped is the longest input looked at, in bytes. Our choice, because the
// longest usual form of a position has about 60; the rest would be garbage.
const maxTyped = 200

// maxQuoted is how much of the input an error repeats, in bytes. Our choice,
// because a message must fit the screen of a phone.
const maxQuoted = 60

// clip cuts s for use in a message, between runes.
func clip(s string, limit int) string {
	if len(s) <= limit {
		return s
	}
	cut := limit
	for cut > 0 && !utf8.RuneStart(s[cut]) {
		cut--
	}
	return s[:cut] + "..."
}

func parseError(kind error, input, part, problem, expected string) *ParseError {
	return &ParseError{
		Kind:     kind,
		Input:    clip(input, maxQuoted),
		Part:     part,
		Problem:  strings.Map(printable, problem), // it may repeat a piece of the input
		Expected: expected,
	}
}

// printable puts the replacement character in the place of what a screen
// cannot show, broken UTF-8 included.
func printable(r rune) rune {
	if unicode.IsPrint(r) {
		return r
	}
	return utf8.RuneError
}
