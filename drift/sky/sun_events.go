package sky

import (
	"math"
	"sort"
	"time"

	"wakeback/drift/nav"
)

// EventKind is something the sun does at one moment.
type EventKind uint8

const (
	AstronomicalDawn EventKind = iota // rises through -18 degrees
	NauticalDawn                      // rises through -12 degrees
	CivilDawn                         // rises through -6 degrees
	Sunrise                           // upper edge on the horizon, rising
	Transit                           // passes the meridian: local noon
	Sunset                            // upper edge on the horizon, setting
	CivilDusk                         // end of civil twilight, -6 degrees
	NauticalDusk                      // end of nautical twilight, -12 degrees
	AstronomicalDusk                  // end of astronomical twilight, -18 degrees
)

// String is fit for a screen.
func (k EventKind) String() string {
	names := [...]string{
		"astronomical dawn", "nautical dawn", "civil dawn", "sunrise", "local noon",
		"sunset", "end of civil twilight", "end of nautical twilight", "end of astronomical twilight",
	}
	if int(k) >= len(names) {
		return "unknown"
	}
	return names[k]
}

// Event is something the sun does, and when. Times hold to about half a minute
// in middle latitudes; near a pole, where the sun slants along the horizon,
// refraction alone can shift them by many minutes.
type Event struct {
	Kind EventKind
	At   time.Time
}

// threshold is an altitude that makes an event each way.
type threshold struct {
	altitudeDeg  float64
	rising, sets EventKind
}

// horizonDeg is the altitude of the sun's centre at sunrise and sunset: 34' of
// refraction and 16' of semi-diameter (almanac convention).
const horizonDeg = -50.0 / 60

// Altitudes of the twilights: almanac convention.
const (
	civilDeg        = -6
	nauticalDeg     = -12
	astronomicalDeg = -18
)

var thresholds = [...]threshold{
	{horizonDeg, Sunrise, Sunset},
	{civilDeg, CivilDawn, CivilDusk},
	{nauticalDeg, NauticalDawn, NauticalDusk},
	{astronomicalDeg, AstronomicalDawn, AstronomicalDusk},
}

// gridSeconds is the step in which the altitude is first looked at. Our
// choice, because two turning points are never closer than hours, so that half
// an hour brackets each.
const gridSeconds = 1800

// sample is the altitude at a Unix time.
type sample struct {
	unix, altitudeDeg float64
}

// curve is the sun's altitude over a span as a list of samples, turning points
// among them: between neighbours it only rises or only falls. So no event is
// missed, not even the two of a sun that barely rises.
func (pl place) curve(from, to float64) []sample {
	steps := int(math.Ceil((to - from) / gridSeconds))
	at := func(i int) sample {
		// One step more at each end, to see turning points beside it.
		unix := from + (to-from)*float64(i)/float64(max(steps, 1))
		return sample{unix, pl.altitudeDeg(unix)}
	}
	out := make([]sample, 0, steps+6)
	a, b := at(-1), at(0)
	out = append(out, b)
	for i := 1; i <= steps+1; i++ {
		c := at(i)
		if (b.altitudeDeg-a.altitudeDeg)*(c.altitudeDeg-b.altitudeDeg) < 0 {
			if turn := pl.turningPoint(a.unix, c.unix, b.altitudeDeg > a.altitudeDeg); turn.unix > from && turn.unix < to {
				out = append(out, turn)
			}
		}
		if i <= steps {
			out = append(out, c)
		}
		a, b = b, c
	}
	sort.Slice(out, func(i, j int) bool { return out[i].unix < out[j].unix })
	return out
}

// turningPoint closes in on the highest or lowest altitude by thirds, to
// within a second: there the altitude is off by less than 1e-7 degree.
func (pl place) turningPoint(from, to float64, highest bool) sample {
	for to-from > 1 {
		third := (to - from) / 3
		lower := pl.altitudeDeg(from+third) < pl.altitudeDeg(to-third)
		if lower == highest {
			from += third
		} else {
			to -= third
		}
	}
	unix := (from + to) / 2
	return sample{unix, pl.altitudeDeg(unix)}
}

// crossing halves the interval until the time is known to a millisecond.
func (pl place) crossing(a, b sample, altitudeDeg float64) float64 {
	rising := b.altitudeDeg > a.altitudeDeg
	lo, hi := a.unix, b.unix
	for hi-lo > 1e-3 {
		mid := (lo + hi) / 2
		if (pl.altitudeDeg(mid) < altitudeDeg) == rising {
			lo = mid
		} else {
			hi = mid
		}
	}
	return hi
}

// transit is the meridian passage in (a, b], a stretch of at most half an
// hour.
func (pl place) transit(a, b float64) nav.Opt[float64] {
	hour := func(unix float64) float64 { return pl.hourAngleDeg(orbitAt(unix), unix) }
	before, after := hour(a), hour(b)
	if !(before < 0 && after >= 0 && after-before < 90) {
		return nav.None[float64]()
	}
	// The hour angle is so nearly linear in time (the equation of time changes
	// by at most half a minute a day) that one line is good to a millisecond.
	return nav.Some(a + (b-a)*before/(before-after))
}

// events lists what the sun does after from, up to and including to.
func (pl place) events(curve []sample) []Event {
	var out []Event
	add := func(kind EventKind, unix float64) {
		out = append(out, Event{kind, timeOf(unix)})
	}
	for i := 1; i < len(curve); i++ {
		a, b := curve[i-1], curve[i]
		for _, th := range thresholds {
			switch {
			case a.altitudeDeg < th.altitudeDeg && b.altitudeDeg >= th.altitudeDeg:
				add(th.rising, pl.crossing(a, b, th.altitudeDeg))
			case a.altitudeDeg >= th.altitudeDeg && b.altitudeDeg < th.altitudeDeg:
				add(th.sets, pl.crossing(a, b, th.altitudeDeg))
			}
		}
		if unix, ok := pl.transit(a.unix, b.unix).Get(); ok {
			add(Transit, unix)
		}
	}
	sort.SliceStable(out, func(i, j int) bool { return out[i].At.Before(out[j].At) })
	return out
}

// timeOf rounds to the millisecond, so that machines which differ in the last
// bits give the same time.
func timeOf(unix float64) time.Time {
	return time.UnixMilli(int64(math.Round(unix * 1000))).UTC()
}
