package sky

import (
	"time"

	"wakeback/drift/nav"
)

// Light is how light it is, by the altitude of the sun.
type Light uint8

const (
	Daylit               Light = iota // the sun is up
	CivilTwilight                     // down to -6 degrees
	NauticalTwilight                  // down to -12 degrees
	AstronomicalTwilight              // down to -18 degrees
	Night                             // below
)

// String is fit for a screen.
func (l Light) String() string {
	names := [...]string{"daylight", "civil twilight", "nautical twilight", "astronomical twilight", "night"}
	if int(l) >= len(names) {
		return "unknown"
	}
	return names[l]
}

// LightAt is the light with the sun's centre at an altitude in degrees.
func LightAt(altitudeDeg float64) Light {
	for i, th := range thresholds {
		if altitudeDeg >= th.altitudeDeg {
			return Light(i)
		}
	}
	return Night
}

// ToSearchBy reports whether there is light to search by eye: to the end of
// civil twilight, up to which things on the ground can be told apart in clear
// weather (the almanac's definition of civil twilight, from memory).
func (l Light) ToSearchBy() bool { return l <= CivilTwilight }

// outlookHorizon is how far an [Outlook] looks ahead. Our choice, because in
// high latitudes an event can come more than 24 hours after the last of its
// kind, and a plan that reaches beyond a day and a half is made anew.
const outlookHorizon = 36 * time.Hour

// Outlook is how light it is at a moment and what comes next.
type Outlook struct {
	At    time.Time
	Sun   SunPosition
	Light Light
	State DayState // of the 24 hours after At
	Next  []Event  // what the sun does in the 36 hours after At, in order of time, in the zone of At
}

// Daylight works out the light at p from at on. Errors are those of [Sun].
func Daylight(p nav.Position, at time.Time) (Outlook, error) {
	if err := checkSun(p, at); err != nil {
		return Outlook{}, err
	}
	pl, from := placeOf(p), unixSeconds(at)
	curve := pl.curve(from, from+outlookHorizon.Seconds())
	o := Outlook{At: at, Sun: pl.sun(from), Next: pl.events(curve)}
	o.Light = LightAt(o.Sun.AltitudeDeg)
	for i := range o.Next {
		o.Next[i].At = o.Next[i].At.In(at.Location())
	}
	day := curve[:0:0]
	for _, s := range curve {
		if s.unix <= from+86400 {
			day = append(day, s)
		}
	}
	o.State = stateOf(span(day))
	return o, nil
}

// First is the next event of a kind; absent when there is none within 36
// hours.
func (o Outlook) First(kind EventKind) nav.Opt[time.Time] { return firstOf(o.Next, kind) }

// DarkAt is when the light to search by ends. It is absent when it is dark
// already, and when it does not get dark within 36 hours; Light tells which.
func (o Outlook) DarkAt() nav.Opt[time.Time] {
	if !o.Light.ToSearchBy() {
		return nav.None[time.Time]()
	}
	return o.First(CivilDusk)
}

// LightAgainAt is when there is light to search by again. It is absent when
// there is light now, and when none comes within 36 hours; Light tells which.
func (o Outlook) LightAgainAt() nav.Opt[time.Time] {
	if o.Light.ToSearchBy() {
		return nav.None[time.Time]()
	}
	return o.First(CivilDawn)
}

// LightLeft is how long there is light to search by: nothing when it is dark,
// absent when it does not get dark within 36 hours.
func (o Outlook) LightLeft() nav.Opt[time.Duration] {
	if !o.Light.ToSearchBy() {
		return nav.Some(time.Duration(0))
	}
	dark, ok := o.DarkAt().Get()
	if !ok {
		return nav.None[time.Duration]()
	}
	return nav.Some(dark.Sub(o.At))
}
