package weather

import (
	"math"
	"time"
)

// Source is the kind of thing an observation came from; the words are those of
// the incident log.
type Source string

// The sources.
const (
	Instrument Source = "instrument" // the vessel's own sensors
	Person     Source = "person"     // an estimate by eye
	Measured   Source = "measured"   // made out of positions and times: a marker, a drifting vessel
	Forecast   Source = "forecast"
	Tables     Source = "tables" // tidal stream atlas or table
)

// Known reports whether s is one of the sources.
func (s Source) Known() bool {
	switch s {
	case Instrument, Person, Measured, Forecast, Tables:
		return true
	}
	return false
}

// Guide reports whether s is computed beforehand, and so interpolated; the
// others are observations, and hold.
func (s Source) Guide() bool { return s == Forecast || s == Tables }

// Medium is what moves: the air or the water.
type Medium uint8

// The media. The zero Medium is neither.
const (
	Wind Medium = iota + 1
	Current
)

// String is the name in a sentence.
func (m Medium) String() string {
	switch m {
	case Wind:
		return "wind"
	case Current:
		return "current"
	}
	return "neither wind nor current"
}

// Reach is how long an observation counts more than a forecast or a table. Our
// choice, because a forecast is no better than an hour-old wind, while a
// tidal stream changes by a third of its strength in half an hour near slack.
func (m Medium) Reach() time.Duration {
	if m == Current {
		return 30 * time.Minute
	}
	return time.Hour
}

// Standard deviations of one component that Breivik and Allen (2008) give to
// the wind and current of forecast models, from memory.
const (
	ModelWindSDMs    = 2.6
	ModelCurrentSDMs = 0.25
)

// DefaultSDMs is the standard deviation of one component, in m/s, of a sample
// that states none.
//
// Wind: an instrument 1.0 (our choice, because upwash, heel and gusts are worth
// two knots), a person 2.0 (our choice, because a Beaufort force is 2 to 4 m/s
// wide and people are one off), a forecast 2.6 (see [ModelWindSDMs]).
//
// Current: from GPS and log 0.17 (0.33 kn: what 0.1 kn of speed over the
// ground, 1 degree of course, 0.3 kn of log and 3 degrees of heading come to),
// a person or a table 0.131 (0.3 kn probable error, the worksheet default of
// the IAMSAR Manual vol. II app. K, from memory), a drift watched 0.05 (our
// choice: 90 m in half an hour), a forecast 0.25 (see [ModelCurrentSDMs]).
func (m Medium) DefaultSDMs(s Source) float64 {
	if m == Wind {
		switch s {
		case Instrument, Measured:
			return 1.0
		case Person:
			return 2.0
		}
		return ModelWindSDMs
	}
	switch s {
	case Instrument:
		return 0.17
	case Person, Tables:
		return 0.131
	case Measured:
		return 0.05
	}
	return ModelCurrentSDMs
}

// ageing is the age at which nothing of an observation is left: our choice,
// because half a tide, and the usual time between two forecasts, is 6 h.
const ageing = 6 * time.Hour

// SDAt is the standard deviation of one component at an age, when a sample of
// standard deviation sdMs is carried beyond its own time: its variance grows
// evenly until, after 6 h, that of a model's field has been added. Our choice;
// the age may be negative, for a time before the sample.
func (m Medium) SDAt(sdMs float64, age time.Duration) float64 {
	full := ModelWindSDMs
	if m == Current {
		full = ModelCurrentSDMs
	}
	share := math.Min(math.Abs(age.Seconds())/ageing.Seconds(), 1)
	return math.Sqrt(sdMs*sdMs + full*full*share)
}
