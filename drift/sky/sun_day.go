package sky

import (
	"math"
	"time"

	"wakeback/drift/nav"
)

// DayState says what kind of day it is, as to the sun being up.
type DayState uint8

const (
	DayAndNight DayState = iota // the sun rises, sets, or both
	MidnightSun                 // the sun stays up
	PolarNight                  // the sun stays down; there may be twilight, see SunDay.HighestDeg
)

// String is fit for a screen.
func (s DayState) String() string {
	switch s {
	case MidnightSun:
		return "the sun does not set"
	case PolarNight:
		return "the sun does not rise"
	}
	return "the sun rises or sets"
}

// SunDay is what the sun does in one local day.
type SunDay struct {
	Begin, End time.Time // local midnights; 23 or 25 hours apart where clocks change
	State      DayState
	HighestDeg float64 // highest altitude of the day
	LowestDeg  float64 // lowest altitude of the day
	Events     []Event // after Begin, up to End, in order of time, in the zone of Begin
}

// Day works out the local day that holds at, in the zone that at carries: an
// almanac's sunset for a date belongs to that date on shore, while in UTC it
// may be the one of the evening before. [NauticalZone] is a zone for a place
// at sea.
//
// In high latitudes a day may hold no event of a kind, or two: a sun that sets
// at 00:05 can set again at 23:55. Errors are those of [Sun].
func Day(p nav.Position, at time.Time) (SunDay, error) {
	if err := checkSun(p, at); err != nil {
		return SunDay{}, err
	}
	y, m, d := at.Date()
	begin := time.Date(y, m, d, 0, 0, 0, 0, at.Location())
	end := time.Date(y, m, d+1, 0, 0, 0, 0, at.Location())
	pl := placeOf(p)
	curve := pl.curve(unixSeconds(begin), unixSeconds(end))
	day := SunDay{Begin: begin, End: end, Events: pl.events(curve)}
	for i := range day.Events {
		day.Events[i].At = day.Events[i].At.In(at.Location())
	}
	day.LowestDeg, day.HighestDeg = span(curve)
	day.State = stateOf(day.LowestDeg, day.HighestDeg)
	return day, nil
}

func span(curve []sample) (lowestDeg, highestDeg float64) {
	lowestDeg, highestDeg = curve[0].altitudeDeg, curve[0].altitudeDeg
	for _, s := range curve {
		lowestDeg = math.Min(lowestDeg, s.altitudeDeg)
		highestDeg = math.Max(highestDeg, s.altitudeDeg)
	}
	return lowestDeg, highestDeg
}

func stateOf(lowestDeg, highestDeg float64) DayState {
	switch {
	case lowestDeg >= horizonDeg:
		return MidnightSun
	case highestDeg < horizonDeg:
		return PolarNight
	}
	return DayAndNight
}

// First is the time of the day's first event of a kind.
func (d SunDay) First(kind EventKind) nav.Opt[time.Time] { return firstOf(d.Events, kind) }

func firstOf(events []Event, kind EventKind) nav.Opt[time.Time] {
	for _, e := range events {
		if e.Kind == kind {
			return nav.Some(e.At)
		}
	}
	return nav.None[time.Time]()
}

// NauticalZone is the zone kept at sea at the longitude of p: whole hours, 15
// degrees wide, around the meridian of Greenwich (common practice).
func NauticalZone(p nav.Position) *time.Location {
	hours := int(math.Round(p.LonDeg() / 15))
	name := "UTC"
	if hours != 0 {
		sign := '+'
		if hours < 0 {
			sign = '-'
		}
		h := max(hours, -hours)
		name += string([]rune{sign, rune('0' + h/10), rune('0' + h%10)})
	}
	return time.FixedZone(name, hours*3600)
}
