package drift

import (
	"errors"
	"fmt"

	"wakeback/drift/nav"
)

// Class is a class of object with its leeway against the wind at 10 m.
type Class struct {
	ID       string
	ReportID string // the name in the report, for comparison
	Object   string // in words
	// Slope is a share of the wind speed, OffsetMs is added; leeway does not
	// fall below zero. DivergenceDeg is how far to each side of downwind it
	// may go.
	Slope, OffsetMs, DivergenceDeg float64
	// Components are the report's regressions, absent until they are filled in.
	Components nav.Opt[Components]
	// WindMinMs and WindMaxMs are the winds of the trials.
	WindMinMs, WindMaxMs nav.Opt[float64]
	// JibesPerHour is how often it changes from one side of downwind to the
	// other.
	JibesPerHour float64
	Source       string
}

// Components are regressions of leeway against wind: downwind, and crosswind to
// either side (positive to the right, so Left is mostly negative).
type Components struct{ Downwind, Right, Left Regression }

// Regression is y = Slope × wind + OffsetMs, with the standard error SyxMs.
type Regression struct{ Slope, OffsetMs, SyxMs float64 }

// At is the fitted leeway in a wind of windMs, m/s.
func (r Regression) At(windMs float64) float64 { return r.Slope*windMs + r.OffsetMs }

// DefaultClass is the class of a person of whom nothing more is known.
const DefaultClass = "person"

// ErrClass is wrapped when there is no class of a name.
var ErrClass = errors.New("not a class of object")

// unpublished are things of which no leeway is published (none was found).
var unpublished = map[string]bool{
	"life-ring": true, "lifebuoy": true, "ring": true, "horseshoe": true,
	"dan-buoy": true, "danbuoy": true, "marker": true, "light": true,
}

// ClassByID finds a class by its ID or its name in the report. The error wraps
// [ErrClass].
func ClassByID(id string) (Class, error) {
	classes, err := Classes()
	if err != nil {
		return Class{}, err
	}
	for _, c := range classes {
		if c.ID == id || c.ReportID == id {
			return c, nil
		}
	}
	if unpublished[id] {
		return Class{}, fmt.Errorf("%w: no leeway is published for %q: log where it drifts, and use the drift measured", ErrClass, id)
	}
	return Class{}, fmt.Errorf("%w: %q; expected one such as person, person-sitting or raft-shallow", ErrClass, clip(id))
}

func clip(s string) string {
	if len(s) > 40 {
		return s[:40] + "..."
	}
	return s
}

// Derived reports whether the downwind and crosswind leeway of the class are
// derived from speed and divergence here, rather than published regressions.
func (c Class) Derived() bool { return !c.Components.IsSet() }
