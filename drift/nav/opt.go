package nav

import (
	"bytes"
	"encoding/json"
)

// Opt is a value that may be absent. The zero Opt is absent. In JSON an
// absent value is null; with the tag option omitzero it is left out.
type Opt[T any] struct {
	value T
	set   bool
}

// Some returns a present value.
func Some[T any](v T) Opt[T] { return Opt[T]{value: v, set: true} }

// None returns an absent value.
func None[T any]() Opt[T] { return Opt[T]{} }

// Get returns the value and whether it is present.
func (o Opt[T]) Get() (T, bool) { return o.value, o.set }

// Or returns the value, or fallback when it is absent.
func (o Opt[T]) Or(fallback T) T {
	if o.set {
		return o.value
	}
	return fallback
}

// IsSet reports whether the value is present.
func (o Opt[T]) IsSet() bool { return o.set }

// IsZero reports whether the value is absent (for the JSON tag omitzero).
func (o Opt[T]) IsZero() bool { return !o.set }

// MarshalJSON writes the value, or null when it is absent.
func (o Opt[T]) MarshalJSON() ([]byte, error) {
	if !o.set {
		return []byte("null"), nil
	}
	return json.Marshal(o.value)
}

// UnmarshalJSON reads a value; null makes it absent.
func (o *Opt[T]) UnmarshalJSON(data []byte) error {
	if bytes.Equal(bytes.TrimSpace(data), []byte("null")) {
		*o = Opt[T]{}
		return nil
	}
	var v T
	if err := json.Unmarshal(data, &v); err != nil {
		return err
	}
	*o = Some(v)
	return nil
}
