package main

import (
	"encoding/json"
	"errors"
	"fmt"
	"io"
	"text/tabwriter"
	"time"

	"wakeback/drift"
	"wakeback/drift/nav"
	"wakeback/search/pattern"
	"wakeback/search/turn"
	"wakeback/server"
	"wakeback/server/feed"
)

// isInput reports whether an error is about what was asked for, and not about
// a failure in doing it.
func isInput(err error) bool {
	for _, target := range []error{
		errInput, drift.ErrCase, drift.ErrClass, pattern.ErrPattern, pattern.ErrNotMadeGood,
		turn.ErrModel, turn.ErrManoeuvre, server.ErrConfig, feed.ErrURL,
	} {
		if errors.Is(err, target) {
			return true
		}
	}
	return false
}

func position(arg, text string) (nav.Position, error) {
	p, err := nav.ParsePosition(text)
	if err != nil {
		return p, badInput(arg, err)
	}
	return p, nil
}

// when reads a time; an empty text is now.
func (e *env) when(arg, text string) (time.Time, error) {
	if text == "" {
		return e.now().UTC().Truncate(time.Second), nil
	}
	t, err := nav.ParseTime(text)
	if err != nil {
		return t, badInput(arg, err)
	}
	return t, nil
}

func direction(arg, text string) (nav.TrueDeg, error) {
	d, err := nav.ParseDirection(text)
	if err != nil {
		return d, badInput(arg, err)
	}
	return d, nil
}

// setDrift reads SET/KN, where a thing goes; an empty text is at rest.
func setDrift(arg, text string) (nav.Velocity, error) {
	if text == "" {
		return nav.Velocity{}, nil
	}
	d, kn, err := nav.ParseDirSpeed(text)
	if err != nil {
		return nav.Velocity{}, badInput(arg, err)
	}
	return nav.Towards(d, kn), nil
}

func more(arg string, v float64) error {
	if !(v > 0) {
		return badInput(arg, fmt.Errorf("expected more than 0"))
	}
	return nil
}

// printJSON prints one JSON document.
func (e *env) printJSON(v any) error {
	enc := json.NewEncoder(e.out)
	enc.SetEscapeHTML(false)
	enc.SetIndent("", "  ")
	return enc.Encode(v)
}

// table prints rows of cells separated by tabs, in columns.
func table(w io.Writer, fill func(w io.Writer)) error {
	tw := tabwriter.NewWriter(w, 0, 0, 2, ' ', 0)
	fill(tw)
	return tw.Flush()
}

func tenth(v float64) float64     { return round(v, 10) }
func hundredth(v float64) float64 { return round(v, 100) }

func round(v, per float64) float64 {
	r := float64(int64(v*per+copysignHalf(v))) / per
	return r
}

func copysignHalf(v float64) float64 {
	if v < 0 {
		return -0.5
	}
	return 0.5
}
