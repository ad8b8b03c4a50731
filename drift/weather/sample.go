package weather

import (
	"cmp"
	"errors"
	"fmt"
	"math"
	"time"

	"wakeback/drift/nav"
)

// Sample is one wind or one current.
type Sample struct {
	// From is when it holds from.
	From time.Time
	// Over is how long it was measured; zero for a moment. It then holds from
	// From as the mean of that time.
	Over time.Duration
	// Velocity is that of the air at 10 m, or of the water over the ground.
	Velocity nav.Velocity
	// SDMs is the standard deviation of each component, m/s; absent means
	// [Medium.DefaultSDMs].
	SDMs nav.Opt[float64]
	// GustMs is the strongest gust, m/s. It is only shown.
	GustMs nav.Opt[float64]
	// Source and Name are what and who said it, Said when; Said orders two
	// samples of one moment.
	Source Source
	Name   string
	Said   time.Time
}

// End is the last moment it was measured at.
func (s Sample) End() time.Time { return s.From.Add(s.Over) }

// ErrSample is wrapped by every refusal of a sample.
var ErrSample = errors.New("not a wind or current")

// FieldError says which field of a sample or a row is wrong and what was
// expected.
type FieldError struct {
	Line     int    // of an imported text; 0 when there is none
	Field    string // as the importer names it
	Value    string
	Expected string
}

// Error is one line, fit for a screen.
func (e *FieldError) Error() string {
	where := ""
	if e.Line > 0 {
		where = fmt.Sprintf("line %d: ", e.Line)
	}
	return fmt.Sprintf("%v: %s%s %q: expected %s", ErrSample, where, e.Field, e.Value, e.Expected)
}

// Unwrap returns [ErrSample].
func (e *FieldError) Unwrap() error { return ErrSample }

// Limits of what is taken. Our choice: the wind is above any measured at sea,
// the current above any tidal race.
const (
	maxWindMs    = 250 * nav.MsPerKn
	maxCurrentMs = 20 * nav.MsPerKn
)

// MaxMs is the fastest that is taken for real.
func (m Medium) MaxMs() float64 {
	if m == Current {
		return maxCurrentMs
	}
	return maxWindMs
}

// Validate returns a [*FieldError] when the sample cannot be used.
func (s Sample) Validate(m Medium) error {
	fail := func(field, value, expected string) error {
		return &FieldError{Field: field, Value: value, Expected: expected}
	}
	speed, sd := s.Velocity.SpeedMs(), s.SDMs.Or(0)
	switch {
	case s.From.IsZero():
		return fail("from", "", "a time")
	case s.Over < 0:
		return fail("over", s.Over.String(), "a duration that is not negative")
	case !(speed <= m.MaxMs()):
		return fail("speed", fmt.Sprintf("%.1f kn", speed/nav.MsPerKn), fmt.Sprintf("0 to %.0f kn for a %v", m.MaxMs()/nav.MsPerKn, m))
	case !(sd >= 0) || math.IsInf(sd, 0):
		return fail("error", fmt.Sprint(sd), "a standard deviation in m/s that is not negative")
	case !s.Source.Known():
		return fail("source", string(s.Source), "instrument, person, measured, forecast or tables")
	}
	return nil
}

// compare orders samples by when they hold from; of one moment, by when they
// were said. What follows only makes the order independent of that of arrival.
func compare(a, b Sample) int {
	return cmp.Or(
		a.From.Compare(b.From), a.Said.Compare(b.Said), cmp.Compare(rank(a.Source), rank(b.Source)),
		cmp.Compare(a.Source, b.Source), cmp.Compare(a.Name, b.Name), cmp.Compare(a.Over, b.Over),
		cmp.Compare(a.Velocity.EastMs, b.Velocity.EastMs), cmp.Compare(a.Velocity.NorthMs, b.Velocity.NorthMs),
		cmp.Compare(a.SDMs.Or(-1), b.SDMs.Or(-1)), cmp.Compare(a.GustMs.Or(-1), b.GustMs.Or(-1)),
	)
}

// rank puts what was measured last, so that it counts.
func rank(s Source) int {
	switch s {
	case Measured:
		return 2
	case Instrument:
		return 1
	}
	return 0
}

// MeanOf makes one sample of those an instrument gave within some minutes: the
// mean of the velocities over that time, with the strongest as the gust of a
// wind. Winds are to be given to a history like this, not one by one. Samples
// that are not valid are left out; it is absent when none is left.
func MeanOf(m Medium, samples []Sample) nav.Opt[Sample] {
	var mean Sample
	var sum nav.Velocity
	n, fastest := 0.0, 0.0
	for _, s := range samples {
		if s.Validate(m) != nil {
			continue
		}
		if n == 0 {
			mean.From, mean.Over = s.From, s.Over
		}
		end := mean.End()
		if s.End().After(end) {
			end = s.End()
		}
		if s.From.Before(mean.From) {
			mean.From = s.From
		}
		mean.Over = end.Sub(mean.From)
		mean.Source, mean.Name = s.Source, s.Name
		if s.Said.After(mean.Said) {
			mean.Said = s.Said
		}
		sum = sum.Add(s.Velocity)
		fastest = max(fastest, s.Velocity.SpeedMs(), s.GustMs.Or(0))
		n++
	}
	if n == 0 {
		return nav.None[Sample]()
	}
	mean.Velocity = sum.Scale(1 / n)
	if m == Wind {
		mean.GustMs = nav.Some(fastest)
	}
	return nav.Some(mean)
}
