package drift

import (
	"errors"
	"fmt"
	"time"

	"wakeback/drift/nav"
	"wakeback/drift/weather"
)

// Case is what is known of one fall.
type Case struct {
	Start Start
	// FellFrom and FellTo are the time in which the fall happened, any moment
	// of it as likely as another; the same moment twice when it is known.
	FellFrom, FellTo time.Time
	Class            Class
	// Winds and Currents may be empty: then nothing is known of them, which is
	// not the same as calm and slack, and the error shows it.
	Winds, Currents weather.History
	// WindDriven adds the wind-driven surface current where no current was
	// observed: see [weather.WindDriven]. For open, deep water only.
	WindDriven bool
	// Coast is where drifting ends; nil for open water.
	Coast Coast
}

// Start is where the fall happened: a point, or any place on a path.
type Start struct {
	// Position and Error95M are the point, and the radius that holds it in 95
	// of 100 cases; when that is absent, that of [UnknownFixProbableM].
	Position nav.Position
	Error95M nav.Opt[float64]
	// Path is where the vessel was, when nobody saw the fall; it takes the
	// place of Position. Error95M is that of its fixes that state none.
	Path nav.Track
}

// Corridor reports whether the fall happened anywhere on a path.
func (s Start) Corridor() bool { return s.Path.Len() > 0 }

// UnknownFixProbableM is the probable error of a position by GPS of which
// nothing more is known: 0.1 nautical mile (Australian National Search and
// Rescue Manual, appendix J, table J-1).
const UnknownFixProbableM = 0.1 * nav.MetresPerNM

// Radii of a circular normal distribution, in standard deviations of one axis:
// sqrt(-2 ln(1-p)) for 50 and 95 %.
const (
	Radius50 = 1.1774100225154747
	Radius95 = 2.447746830680816
)

// error95M is the error of the start.
func (s Start) error95M() float64 {
	return s.Error95M.Or(UnknownFixProbableM / Radius50 * Radius95)
}

// FallPoint is where the fall happened when the mark was pressed delay later:
// back along the vessel's motion over the ground. It is the mark itself when
// the motion is not known.
func FallPoint(mark nav.Fix, delay time.Duration) nav.Position {
	v := mark.Velocity().Or(nav.Velocity{})
	return mark.Position.Shift(v.For(-delay))
}

// ErrCase is wrapped by every refusal of a case.
var ErrCase = errors.New("drift cannot be worked out")

// MaxAge is the longest drift that is worked out. Our choice, because after two
// weeks nothing is left of any of the errors' rules.
const MaxAge = 14 * 24 * time.Hour

// Validate returns an error that wraps [ErrCase] when the case cannot be
// worked.
func (c Case) Validate() error {
	fail := func(format string, a ...any) error { return fmt.Errorf("%w: "+format, append([]any{ErrCase}, a...)...) }
	if c.FellFrom.IsZero() || c.FellTo.Before(c.FellFrom) {
		return fail("time of the fall: expected a time, or two in order")
	}
	if c.FellTo.Sub(c.FellFrom) > MaxAge {
		return fail("time of the fall: expected a window of at most %d days", int(MaxAge.Hours()/24))
	}
	if e, ok := c.Start.Error95M.Get(); ok && !(e >= 0 && finite(e)) {
		return fail("error of the start: expected metres, not negative")
	}
	if m := c.Winds.Medium(); m != 0 && m != weather.Wind {
		return fail("winds: expected a history of wind")
	}
	if m := c.Currents.Medium(); m != 0 && m != weather.Current {
		return fail("currents: expected a history of current")
	}
	if err := c.Class.Validate(); err != nil {
		return fmt.Errorf("%w: %w", ErrCase, err)
	}
	return c.validateStart()
}

func (c Case) validateStart() error {
	if !c.Start.Corridor() {
		if err := c.Start.Position.Validate(); err != nil {
			return fmt.Errorf("%w: start: %w", ErrCase, err)
		}
		return nil
	}
	plane := c.plane()
	for _, f := range c.pathFixes() {
		if err := f.Position.Validate(); err != nil {
			return fmt.Errorf("%w: path: %w", ErrCase, err)
		}
		if e, ok := f.ErrorM.Get(); ok && !(e >= 0 && finite(e)) {
			return fmt.Errorf("%w: path: expected errors in metres, not negative", ErrCase)
		}
		if !(plane.Offset(f.Position).RangeM() <= maxPlaneM) {
			return fmt.Errorf("%w: path: expected within %d km of its middle", ErrCase, maxPlaneM/1000)
		}
	}
	return nil
}

// maxPathFixes is how many fixes of a path are used. Our choice, because a watch
// of four hours then has one every 7 seconds, 22 m at 6 knots.
const maxPathFixes = 2000

// pathFixes are the fixes of the time of the fall, both its ends included,
// thinned evenly where they are many.
func (c Case) pathFixes() []nav.Fix {
	first, last := pathAt(c.Start.Path, c.FellFrom), pathAt(c.Start.Path, c.FellTo)
	first.At, last.At = c.FellFrom, c.FellTo
	between := c.Start.Path.Between(c.FellFrom, c.FellTo)
	every := len(between)/maxPathFixes + 1
	out := []nav.Fix{first}
	for i := 0; i < len(between); i += every {
		out = append(out, between[i])
	}
	return append(out, last)
}

// maxPlaneM bounds a path. At this range from the middle, distances across are
// 0.1 % out (see [nav.Plane]), a tenth of what the wind and current leave.
const maxPlaneM = 500_000

// fellMid is the middle of the time of the fall.
func (c Case) fellMid() time.Time { return c.FellFrom.Add(c.FellTo.Sub(c.FellFrom) / 2) }

// plane is the plane the case is worked in: around the point, or around where
// the vessel was in the middle of the time of the fall. It is never moved
// while a case lasts: after 48 h at two knots, 180 km out, distances across are
// out by 0.013 %, 24 m.
func (c Case) plane() nav.Plane {
	if !c.Start.Corridor() {
		return nav.NewPlane(c.Start.Position)
	}
	return nav.NewPlane(pathAt(c.Start.Path, c.fellMid()).Position)
}

// pathAt is where the vessel was: between two fixes on the line between them
// however far apart they are in time, before the first and after the last at
// that one.
func pathAt(t nav.Track, at time.Time) nav.Fix {
	if f, ok := t.At(at, 1<<62).Get(); ok {
		return f
	}
	if f, ok := t.FirstAfter(at).Get(); ok {
		return f
	}
	return t.Last().Or(nav.Fix{})
}
