package sky

import (
	"math"
	"testing"
	"time"

	"pgregory.net/rapid"

	"wakeback/drift/nav"
)

// TestDaylight: sunset 22:25, end of civil twilight 22:54, of nautical 23:27,
// sunrise 12:17 UTC at 41.281944 N 84.362778 W on 8 November 2019 (USNO
// tables). The day after, the sun rises a minute and a bit later.
func TestDaylight(t *testing.T) {
	p := nav.PositionFromDegrees(41.281944, -84.362778)
	at := mustTime(t, "2019-11-08T21:00:00Z")
	o, err := Daylight(p, at)
	if err != nil {
		t.Fatal(err)
	}
	if o.Light != Daylit || o.State != DayAndNight {
		t.Errorf("%v, %v", o.Light, o.State)
	}
	for kind, want := range map[EventKind]string{
		Sunset: "2019-11-08T22:25:00Z", CivilDusk: "2019-11-08T22:54:00Z", NauticalDusk: "2019-11-08T23:27:00Z", Sunrise: "2019-11-09T12:18:00Z",
	} {
		if got, _ := o.First(kind).Get(); got.Sub(mustTime(t, want)).Abs() > 40*time.Second {
			t.Errorf("%v at %v, want %s", kind, got, want)
		}
	}
	left, ok := o.LightLeft().Get()
	if !ok || (left-114*time.Minute).Abs() > 40*time.Second { // 21:00 to 22:54
		t.Errorf("light left %v, want 1 h 54 min", left)
	}
	if o.LightAgainAt().IsSet() {
		t.Error("light again, while there is light")
	}
}

func TestDaylightByPhase(t *testing.T) {
	p := nav.PositionFromDegrees(41.281944, -84.362778)
	tests := []struct {
		at    string
		light Light
		next  EventKind
	}{
		{"2019-11-08T22:40:00Z", CivilTwilight, CivilDusk},
		{"2019-11-08T23:10:00Z", NauticalTwilight, NauticalDusk},
		{"2019-11-08T23:45:00Z", AstronomicalTwilight, AstronomicalDusk},
		{"2019-11-09T05:00:00Z", Night, AstronomicalDawn},
		{"2019-11-08T12:00:00Z", CivilTwilight, Sunrise},
	}
	for _, tc := range tests {
		o, err := Daylight(p, mustTime(t, tc.at))
		if err != nil {
			t.Fatal(err)
		}
		if o.Light != tc.light || len(o.Next) == 0 || o.Next[0].Kind != tc.next {
			t.Errorf("%s: %v, next %v; want %v, next %v", tc.at, o.Light, o.Next, tc.light, tc.next)
		}
		dark := tc.light > CivilTwilight
		if o.LightAgainAt().IsSet() != dark || o.DarkAt().IsSet() == dark {
			t.Errorf("%s: light again %v, dark %v", tc.at, o.LightAgainAt(), o.DarkAt())
		}
	}
}

func TestDaylightNearThePole(t *testing.T) {
	summer, err := Daylight(nav.PositionFromDegrees(75, 20), mustTime(t, "2026-06-21T12:00:00Z"))
	if err != nil || summer.State != MidnightSun || summer.LightLeft().IsSet() || summer.Light != Daylit {
		t.Errorf("summer: %+v, %v", summer, err)
	}
	winter, err := Daylight(nav.PositionFromDegrees(85, 20), mustTime(t, "2026-12-21T12:00:00Z"))
	if err != nil || winter.State != PolarNight || winter.LightAgainAt().IsSet() || winter.Light.ToSearchBy() {
		t.Errorf("winter: %+v, %v", winter, err)
	}
	if left, ok := winter.LightLeft().Get(); !ok || left != 0 {
		t.Errorf("winter: light left %v, %v, want none", left, ok)
	}
	pole, err := Daylight(nav.PositionFromDegrees(-90, 0), mustTime(t, "2026-12-21T12:00:00Z"))
	if err != nil || pole.State != MidnightSun || math.Abs(pole.Sun.AltitudeDeg-23.44) > 0.01 { // the obliquity
		t.Errorf("pole: %+v, %v", pole, err)
	}
}

// TestPhasesFollowOneAnother: from one event to the next the light changes as
// the event says.
func TestPhasesFollowOneAnother(t *testing.T) {
	after := map[EventKind]Light{
		AstronomicalDawn: AstronomicalTwilight, NauticalDawn: NauticalTwilight, CivilDawn: CivilTwilight, Sunrise: Daylit,
		Sunset: CivilTwilight, CivilDusk: NauticalTwilight, NauticalDusk: AstronomicalTwilight, AstronomicalDusk: Night,
	}
	rapid.Check(t, func(t *rapid.T) {
		p := nav.PositionFromDegrees(rapid.Float64Range(-90, 90).Draw(t, "lat"), rapid.Float64Range(-180, 180).Draw(t, "lon"))
		o, err := Daylight(p, time.Unix(rapid.Int64Range(0, 4e9).Draw(t, "unix"), 0))
		if err != nil {
			t.Fatal(err)
		}
		light := o.Light
		for _, e := range o.Next {
			if e.Kind == Transit {
				continue
			}
			now := after[e.Kind]
			if d := int(now) - int(light); d != 1 && d != -1 {
				t.Fatalf("%v after %v", e.Kind, light)
			}
			light = now
		}
	})
}

func TestGlare(t *testing.T) {
	at := mustTime(t, "2003-10-17T12:30:30-07:00") // azimuth 194.34, altitude 39.87
	sun, err := Sun(nav.PositionFromDegrees(39.742476, -105.1786), at)
	if err != nil {
		t.Fatal(err)
	}
	sector, ok := sun.Glare().Get()
	if !ok {
		t.Fatal("no glare with the sun at 40 degrees")
	}
	for bearing, want := range map[nav.TrueDeg]bool{194: true, 175: true, 174: false, 214: true, 215: false, 14: false} {
		if sector.Contains(bearing) != want {
			t.Errorf("bearing %v in glare: %v, want %v", bearing, !want, want)
		}
	}
	if !(Sector{Centre: 355, HalfDeg: 20}).Contains(10) {
		t.Error("a sector across north does not hold 010")
	}
	for _, alt := range []float64{-0.9, 45.1, 90, math.NaN()} {
		if (SunPosition{AltitudeDeg: alt, AzimuthTrue: 180}).Glare().IsSet() {
			t.Errorf("glare with the sun at %v degrees", alt)
		}
	}
}

// TestGlareReason works out what the comment on GlareHalfDeg says: how far
// from the sun's bearing a facet of the sea as steep as twice the usual slope
// sends its light along the horizon to a low eye.
func TestGlareReason(t *testing.T) {
	const windMs = 20 * nav.MsPerKn
	steepest := 2 * math.Sqrt(0.003+0.00512*windMs)
	widest := 0.0
	for alt := 1.0; alt <= glareHighestDeg; alt++ {
		for off := 0.0; off < 90; off += 0.1 {
			sinAlt, cosAlt := math.Sincos(alt * radPerDeg)
			sinOff, cosOff := math.Sincos(off * radPerDeg)
			// The facet's normal halves the angle between sun and eye.
			if slope := math.Hypot(cosAlt-cosOff, sinOff) / sinAlt; slope <= steepest {
				widest = math.Max(widest, off)
			}
		}
	}
	if widest < 12 || widest > 13 || widest > GlareHalfDeg {
		t.Errorf("reflections reach to %v degrees from the sun's bearing, want 12 to 13", widest)
	}
}
