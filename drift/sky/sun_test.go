package sky

import (
	"errors"
	"math"
	"strings"
	"testing"
	"time"

	"pgregory.net/rapid"

	"wakeback/drift/nav"
)

func mustTime(t testing.TB, text string) time.Time {
	t.Helper()
	at, err := time.Parse(time.RFC3339Nano, text)
	if err != nil {
		t.Fatal(err)
	}
	return at
}

var kindOfRow = map[string]EventKind{
	"astronomical dawn": AstronomicalDawn, "nautical dawn": NauticalDawn, "civil dawn": CivilDawn, "sunrise": Sunrise,
	"upper transit": Transit, "sunset": Sunset, "civil dusk": CivilDusk, "nautical dusk": NauticalDusk,
	"astronomical dusk": AstronomicalDusk,
}

// TestSunEventsPublished checks every row of the table of almanac times.
func TestSunEventsPublished(t *testing.T) {
	rows := readTable(t, "sun-checks.csv")
	if len(rows) != 23 {
		t.Fatalf("%d rows, want 23", len(rows))
	}
	for _, row := range rows {
		p := nav.PositionFromDegrees(number(t, row, "lat"), number(t, row, "lon_east"))
		day, err := Day(p, mustTime(t, row["date_utc"]+"T12:00:00Z"))
		if err != nil {
			t.Errorf("%v: %v", row, err)
			continue
		}
		kind, known := kindOfRow[row["event"]]
		// The day of universal time may hold two of a kind; one row has them
		// (astronomical dusk at 00:00:15 and 23:59:21).
		published := mustTime(t, row["date_utc"]+"T"+row["utc_published_rounded"]+":00Z")
		got, ok := nearest(day.Events, kind, published)
		if !known || !ok {
			t.Errorf("%s %s at %v: not found", row["date_utc"], row["event"], p)
			continue
		}
		// The table is rounded to the minute: 30 s. The sun is good to 0.01
		// degree, 2.4 s of its daily turn, and at 60 degrees of latitude it
		// climbs at half of that pace: 5 s.
		if d := got.Sub(published).Abs(); d > 35*time.Second {
			t.Errorf("%s %s at %v: got %s, published %s", row["date_utc"], row["event"], p, got.Format(time.TimeOnly), row["utc_published_rounded"])
		}
		// The other program's figure is rounded to 0.1 s; its transit and the
		// way it converges may differ by a second.
		computed := mustTime(t, row["date_utc"]+"T"+row["computed_utc"]+"Z")
		if d := got.Sub(computed).Abs(); d > time.Second {
			t.Errorf("%s %s at %v: got %s, computed elsewhere %s", row["date_utc"], row["event"], p, got.Format("15:04:05.0"), row["computed_utc"])
		}
	}
}

// nearest is the event of a kind closest to a time.
func nearest(events []Event, kind EventKind, to time.Time) (at time.Time, ok bool) {
	for _, e := range events {
		if e.Kind == kind && (!ok || e.At.Sub(to).Abs() < at.Sub(to).Abs()) {
			at, ok = e.At, true
		}
	}
	return at, ok
}

// TestSunWorkedExample is the example of Reda and Andreas, Solar Position
// Algorithm, NREL/TP-560-34302, table A5.1, for a high-accuracy method. Its
// printed sunset, 17:20:19, belongs to the evening before (its day is one of
// universal time); 17:18:51 is the one of the local day, computed elsewhere.
func TestSunWorkedExample(t *testing.T) {
	p := nav.PositionFromDegrees(39.742476, -105.1786)
	at := mustTime(t, "2003-10-17T12:30:30-07:00")
	sun, err := Sun(p, at)
	if err != nil {
		t.Fatal(err)
	}
	// 0.01 degree is the accuracy of the formulas (Meeus, chapter 25).
	if math.Abs(sun.AltitudeDeg-39.872046) > 0.01 || math.Abs(sun.AzimuthTrue.Minus(194.340241)) > 0.01 {
		t.Errorf("Sun = %v %v, want altitude 39.872046, azimuth 194.340241", sun.AltitudeDeg, float64(sun.AzimuthTrue))
	}
	day, err := Day(p, at)
	if err != nil {
		t.Fatal(err)
	}
	for kind, want := range map[EventKind]string{Sunrise: "2003-10-17T06:12:43-07:00", Sunset: "2003-10-17T17:18:51-07:00"} {
		got, _ := day.First(kind).Get()
		if d := got.Sub(mustTime(t, want)).Abs(); d > 30*time.Second {
			t.Errorf("%v %v, want %s", kind, got, want)
		}
	}
	evening, err := Day(p, at.AddDate(0, 0, -1))
	if err != nil {
		t.Fatal(err)
	}
	if got, _ := evening.First(Sunset).Get(); got.Sub(mustTime(t, "2003-10-16T17:20:19-07:00")).Abs() > 30*time.Second {
		t.Errorf("sunset of the evening before %v, want 17:20:19", got)
	}
}

// TestSunLongitude is example 25.a of Meeus (from memory).
func TestSunLongitude(t *testing.T) {
	o := orbitAt(float64(mustTime(t, "1992-10-13T00:00:00Z").Unix()))
	if dec := math.Asin(o.sinDec) * degPerRad; math.Abs(o.apparentDeg-199.90895) > 1e-5 || math.Abs(dec - -7.78507) > 1e-5 {
		t.Errorf("longitude %v, declination %v, want 199.90895, -7.78507", o.apparentDeg, dec)
	}
}

func TestDayState(t *testing.T) {
	tests := []struct {
		name     string
		lat, lon float64
		at       string
		state    DayState
		kinds    string // events, in order
	}{
		{"midnight sun", 70, 20, "2026-06-21T12:00:00+02:00", MidnightSun, "local noon"},
		{"polar night with twilight", 70, 20, "2026-12-21T12:00:00+01:00", PolarNight,
			"astronomical dawn, nautical dawn, civil dawn, local noon, end of civil twilight, end of nautical twilight, end of astronomical twilight"},
		{"polar night, dark", 89, 20, "2026-12-21T12:00:00Z", PolarNight, "local noon"},
		{"white night", 61, 25, "2026-06-21T12:00:00+03:00", DayAndNight, "sunrise, local noon, sunset"},
		{"equator", 0, 0, "2026-03-20T12:00:00Z", DayAndNight,
			"astronomical dawn, nautical dawn, civil dawn, sunrise, local noon, sunset, end of civil twilight, end of nautical twilight, end of astronomical twilight"},
		{"southern summer", -75, 0, "2026-12-21T12:00:00Z", MidnightSun, "local noon"},
	}
	for _, tc := range tests {
		day, err := Day(nav.PositionFromDegrees(tc.lat, tc.lon), mustTime(t, tc.at))
		if err != nil {
			t.Errorf("%s: %v", tc.name, err)
			continue
		}
		var kinds []string
		for _, e := range day.Events {
			kinds = append(kinds, e.Kind.String())
		}
		if got := strings.Join(kinds, ", "); day.State != tc.state || got != tc.kinds {
			t.Errorf("%s: %v, %s", tc.name, day.State, got)
		}
	}
}

// TestPolarTwilight: 70 N 20 E, 21 December 2026, computed elsewhere to the
// minute: civil twilight from 08:34 to 12:42 UTC.
func TestPolarTwilight(t *testing.T) {
	day, err := Day(nav.PositionFromDegrees(70, 20), mustTime(t, "2026-12-21T12:00:00Z"))
	if err != nil {
		t.Fatal(err)
	}
	for kind, want := range map[EventKind]string{CivilDawn: "2026-12-21T08:34:00Z", CivilDusk: "2026-12-21T12:42:00Z"} {
		if got, _ := day.First(kind).Get(); got.Sub(mustTime(t, want)).Abs() > time.Minute {
			t.Errorf("%v %v, want %s", kind, got, want)
		}
	}
}

// TestTwoSunsetsInADay: before the midnight sun, sunset moves on past midnight
// and skips a date; after it, sunset moves back and one date has two.
func TestTwoSunsetsInADay(t *testing.T) {
	p := nav.PositionFromDegrees(68, 15)
	days := map[int]int{} // by number of sunsets, days that are no midnight sun
	for at := mustTime(t, "2026-05-01T12:00:00+02:00"); at.Month() < 9; at = at.AddDate(0, 0, 1) {
		day, err := Day(p, at)
		if err != nil {
			t.Fatal(err)
		}
		n := 0
		for _, e := range day.Events {
			if e.Kind == Sunset {
				n++
			}
		}
		if day.State == DayAndNight {
			days[n]++
		}
	}
	if days[0] != 1 || days[2] != 1 || days[1] < 50 {
		t.Errorf("days by number of sunsets: %v, want one with none, one with two", days)
	}
}

func TestDayWhereClocksChange(t *testing.T) {
	// A zone by rule, without a database of zones: the day has 23 hours if
	// begin and end have different offsets. Fixed zones have 24.
	day, err := Day(nav.PositionFromDegrees(54, 8), mustTime(t, "2026-03-29T12:00:00+02:00"))
	if err != nil || day.End.Sub(day.Begin) != 24*time.Hour || day.Begin.Format(time.RFC3339) != "2026-03-29T00:00:00+02:00" {
		t.Errorf("%v to %v, %v", day.Begin, day.End, err)
	}
	zone, err := time.LoadLocation("Europe/Berlin")
	if err != nil {
		t.Skip("no database of time zones here")
	}
	day, err = Day(nav.PositionFromDegrees(54, 8), time.Date(2026, 3, 29, 12, 0, 0, 0, zone))
	if err != nil || day.End.Sub(day.Begin) != 23*time.Hour {
		t.Errorf("%v to %v, %v, want 23 hours", day.Begin, day.End, err)
	}
}

func TestSunRefuses(t *testing.T) {
	good, at := nav.PositionFromDegrees(54, 8), mustTime(t, "2026-05-04T12:00:00Z")
	bad := nav.PositionFromDegrees(math.NaN(), 8)
	calls := map[string]func(nav.Position, time.Time) error{
		"Sun":      func(p nav.Position, at time.Time) error { _, err := Sun(p, at); return err },
		"Day":      func(p nav.Position, at time.Time) error { _, err := Day(p, at); return err },
		"Daylight": func(p nav.Position, at time.Time) error { _, err := Daylight(p, at); return err },
	}
	for name, call := range calls {
		if err := call(bad, at); !errors.Is(err, nav.ErrPosition) {
			t.Errorf("%s of no position: %v", name, err)
		}
		err := call(good, time.Time{})
		if !errors.Is(err, ErrSunTime) || err.Error() != "sun unknown: years 1900 to 2100 are covered, the date is 0001-01-01" {
			t.Errorf("%s of no time: %v", name, err)
		}
		if err := call(good, at); err != nil {
			t.Errorf("%s: %v", name, err)
		}
	}
}

// TestEventsSitOnTheirAltitude checks each event over the whole earth against
// the altitude it stands for, and that dawn is dawn and dusk is dusk.
func TestEventsSitOnTheirAltitude(t *testing.T) {
	rapid.Check(t, func(t *rapid.T) {
		p := nav.PositionFromDegrees(rapid.Float64Range(-90, 90).Draw(t, "lat"), rapid.Float64Range(-180, 180).Draw(t, "lon"))
		at := time.Unix(rapid.Int64Range(0, 4e9).Draw(t, "unix"), 0).In(NauticalZone(p))
		day, err := Day(p, at)
		if err != nil {
			t.Fatal(err)
		}
		pl := placeOf(p)
		for _, e := range day.Events {
			if !e.At.After(day.Begin) || e.At.After(day.End) {
				t.Fatalf("%v %v is outside of %v to %v", e.Kind, e.At, day.Begin, day.End)
			}
			if e.Kind == Transit {
				// A millisecond is 4e-6 degree; the straight line adds as much.
				unix := unixSeconds(e.At)
				if h := pl.hourAngleDeg(orbitAt(unix), unix); math.Abs(h) > 1e-5 {
					t.Fatalf("local noon at hour angle %v", h)
				}
				continue
			}
			for _, th := range thresholds {
				if e.Kind != th.rising && e.Kind != th.sets {
					continue
				}
				// Two milliseconds at 15 degrees an hour are 8e-6 degree.
				unix := unixSeconds(e.At)
				if alt := pl.altitudeDeg(unix); math.Abs(alt-th.altitudeDeg) > 1e-5 {
					t.Fatalf("%v at altitude %v", e.Kind, alt)
				}
				if rising := pl.altitudeDeg(unix+0.1) > pl.altitudeDeg(unix-0.1); math.Abs(pl.altitudeDeg(unix+0.1)-pl.altitudeDeg(unix-0.1)) > 1e-9 && rising != (e.Kind == th.rising) {
					t.Fatalf("%v, but rising is %v", e.Kind, rising)
				}
			}
		}
	})
}

// TestNoEventIsMissed counts by looking every minute, which is how a person
// with a table would, and compares. Such a count misses only the pair of a sun
// that crosses and comes back within the minute.
func TestNoEventIsMissed(t *testing.T) {
	rapid.Check(t, func(t *rapid.T) {
		lat := rapid.OneOf(rapid.Float64Range(-90, 90), rapid.Float64Range(64, 69)).Draw(t, "lat")
		p := nav.PositionFromDegrees(lat, rapid.Float64Range(-180, 180).Draw(t, "lon"))
		at := time.Unix(rapid.Int64Range(1.7e9, 1.9e9).Draw(t, "unix"), 0).UTC()
		day, err := Day(p, at)
		if err != nil {
			t.Fatal(err)
		}
		pl := placeOf(p)
		for i, th := range thresholds {
			found := 0
			for _, e := range day.Events {
				if e.Kind == th.rising || e.Kind == th.sets {
					found++
				}
			}
			counted, margin := 0, math.Inf(1)
			begin := unixSeconds(day.Begin)
			before := pl.altitudeDeg(begin)
			for m := 1; m <= 1440; m++ {
				alt := pl.altitudeDeg(begin + float64(m)*60)
				if (before < th.altitudeDeg) != (alt < th.altitudeDeg) {
					counted++
				}
				if m > 1 && m < 1440 {
					next := pl.altitudeDeg(begin + float64(m+1)*60)
					if (alt-before)*(next-alt) <= 0 { // a turning point
						margin = math.Min(margin, math.Abs(alt-th.altitudeDeg))
					}
				}
				before = alt
			}
			// Within a minute of a turning point the altitude moves by less
			// than 15 degrees an hour times 0.0044/2 rad: 3e-4 degree.
			if counted != found && !(found == counted+2 && margin < 1e-3) {
				t.Fatalf("threshold %d: %d found, %d counted", i, found, counted)
			}
		}
	})
}

func TestNauticalZone(t *testing.T) {
	tests := []struct {
		lon  float64
		want string
		s    int
	}{{0, "UTC", 0}, {7.4, "UTC", 0}, {7.6, "UTC+01", 3600}, {-7.6, "UTC-01", -3600}, {-122, "UTC-08", -28800}, {179, "UTC+12", 43200}}
	for _, tc := range tests {
		name, s := time.Unix(0, 0).In(NauticalZone(nav.PositionFromDegrees(50, tc.lon))).Zone()
		if name != tc.want || s != tc.s {
			t.Errorf("NauticalZone(%v) = %s %d, want %s %d", tc.lon, name, s, tc.want, tc.s)
		}
	}
}

func BenchmarkDaylight(b *testing.B) {
	p, at := nav.PositionFromDegrees(54.1, 7.9), mustTime(b, "2026-05-04T12:00:00Z")
	b.ReportAllocs()
	for b.Loop() {
		if _, err := Daylight(p, at); err != nil {
			b.Fatal(err)
		}
	}
}
