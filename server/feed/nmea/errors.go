package nmea

import (
	"errors"
	"fmt"
)

// What can be wrong with a line. Every error of this package wraps exactly one
// of these.
var (
	// ErrMalformed is a line that is no sentence, or a field that cannot be read.
	ErrMalformed = errors.New("malformed sentence")
	// ErrChecksum is a sentence whose checksum does not fit.
	ErrChecksum = errors.New("bad checksum")
	// ErrNoChecksum is a sentence without a checksum.
	ErrNoChecksum = errors.New("no checksum")
	// ErrUnknown is a sound sentence of a kind that is not decoded here.
	ErrUnknown = errors.New("sentence not known")
)

// FieldError says which field of which sentence cannot be read. It wraps
// [ErrMalformed].
type FieldError struct {
	Formatter string // "RMC"
	Field     string // "latitude"
	Value     string // what was there
	Want      string // what was expected
}

// Error names the field and what was expected.
func (e *FieldError) Error() string {
	return fmt.Sprintf("%s: %s is %q, expected %s", e.Formatter, e.Field, e.Value, e.Want)
}

// Unwrap returns [ErrMalformed].
func (e *FieldError) Unwrap() error { return ErrMalformed }
