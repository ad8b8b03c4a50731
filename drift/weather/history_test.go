package weather

import (
	"errors"
	"math"
	"math/rand/v2"
	"testing"
	"time"

	"pgregory.net/rapid"

	"wakeback/drift/nav"
)

func at(hhmm string) time.Time {
	t, err := time.Parse("2006-01-02 15:04", "2026-06-01 "+hhmm)
	if err != nil {
		panic(err)
	}
	return t
}

func flow(from string, set nav.TrueDeg, kn float64, s Source) Sample {
	return Sample{From: at(from), Velocity: nav.Towards(set, kn), Source: s, Said: at(from)}
}

func mustCurrents(t testing.TB, s ...Sample) History {
	t.Helper()
	h, err := NewCurrents(s...)
	if err != nil {
		t.Fatal(err)
	}
	return h
}

func TestWhatHolds(t *testing.T) {
	observed := mustCurrents(t, flow("10:00", 90, 1, Person), flow("11:00", 90, 2, Instrument))
	mixed := mustCurrents(t, flow("08:00", 90, 10, Tables), flow("12:00", 90, 14, Tables), flow("10:00", 90, 1, Person))
	late := mustCurrents(t, flow("08:00", 90, 10, Tables), flow("10:00", 90, 1, Person))
	watched := mustCurrents(t, flow("08:00", 90, 10, Tables), flow("12:00", 90, 14, Tables),
		Sample{From: at("09:00"), Over: 30 * time.Minute, Velocity: nav.Towards(90, 3), Source: Measured})
	said := flow("10:00", 90, 5, Person)
	said.Said = at("10:20")
	for _, c := range []struct {
		name string
		h    History
		at   string
		kn   float64
	}{
		{"an observation holds from its moment", observed, "10:00", 1},
		{"until the next", observed, "10:59", 1},
		{"of which the moment is its own", observed, "11:00", 2},
		{"the last holds on", observed, "15:00", 2},
		{"the first holds backwards", observed, "07:00", 1},
		{"a table is interpolated", mixed, "09:00", 11},
		{"an observation within its reach outranks it", mixed, "10:30", 1},
		{"beyond it the table counts again", mixed, "10:31", 12.516},
		{"just before the first observation too", mixed, "09:30", 1},
		{"the last of a table holds on", mixed, "13:00", 14},
		{"the first of a table holds backwards", mixed, "07:00", 10},
		{"an observation newer than the end of the table holds on", late, "15:00", 1},
		{"a drift watched holds while it was watched", watched, "09:29", 3},
		{"and its reach beyond", watched, "10:00", 3},
		{"of one moment what was said last", mustCurrents(t, said, flow("10:00", 90, 1, Person)), "10:10", 5},
	} {
		t.Run(c.name, func(t *testing.T) {
			v, ok := c.h.At(at(c.at)).Get()
			if !ok {
				t.Fatal("absent")
			}
			near(t, "kn", v.Velocity.SpeedKn(), c.kn, 0.001)
		})
	}
}

func TestNothingKnownIsNotSlack(t *testing.T) {
	h := mustCurrents(t)
	if h.At(at("10:00")).IsSet() || h.Mean(at("10:00"), at("11:00")).IsSet() || h.Pieces(at("10:00"), at("11:00")) != nil {
		t.Error("a current out of nothing")
	}
	var zero History
	if err := zero.Add(flow("10:00", 90, 1, Person)); err == nil {
		t.Error("a history of nothing takes a sample")
	}
}

// Interpolated by components: between a stream and the opposite one lies slack
// water, not a stream across.
func TestTideTurnsThroughSlack(t *testing.T) {
	h := mustCurrents(t, flow("10:00", 80, 1.2, Tables), flow("11:00", 260, 1.2, Tables))
	v, _ := h.At(at("10:30")).Get()
	near(t, "kn at slack", v.Velocity.SpeedKn(), 0, 1e-9)
	v, _ = h.At(at("10:15")).Get()
	near(t, "kn before", v.Velocity.SpeedKn(), 0.6, 1e-9)
	near(t, "set before", float64(v.Velocity.Direction().Or(-1)), 80, 1e-9)
	if !v.Between || v.Age != 0 {
		t.Errorf("between = %v, age = %v", v.Between, v.Age)
	}
}

// The error of what is carried on grows, and never falls below its own.
func TestErrorGrowsWithAge(t *testing.T) {
	h := mustCurrents(t, flow("10:00", 90, 1, Person))
	last := 0.0
	for _, age := range []string{"10:00", "10:10", "11:00", "13:00", "16:00", "20:00"} {
		v, _ := h.At(at(age)).Get()
		if v.SDMs < last || v.SDMs < Current.DefaultSDMs(Person) {
			t.Errorf("at %s the error is %v, after %v", age, v.SDMs, last)
		}
		last = v.SDMs
	}
	near(t, "error when nothing is left of it", last, math.Hypot(0.131, ModelCurrentSDMs), 1e-12)
	before, _ := h.At(at("09:00")).Get()
	after, _ := h.At(at("11:00")).Get()
	if before.SDMs != after.SDMs || before.Age != -time.Hour {
		t.Errorf("an hour before: %v at age %v; after: %v", before.SDMs, before.Age, after.SDMs)
	}
}

// Between two of a table the error is between theirs; a drift watched for a
// while ages from the end of the watch.
func TestErrorBetweenAndAfter(t *testing.T) {
	a, b := flow("10:00", 90, 1, Tables), flow("11:00", 90, 1, Tables)
	a.SDMs, b.SDMs = nav.Some(0.1), nav.Some(0.3)
	v, _ := mustCurrents(t, a, b).At(at("10:15")).Get()
	near(t, "error between", v.SDMs, 0.15, 1e-12)
	watched := Sample{From: at("09:00"), Over: 30 * time.Minute, Velocity: nav.Towards(90, 3), Source: Measured}
	h := mustCurrents(t, watched)
	for when, age := range map[string]time.Duration{"09:00": 0, "09:20": 0, "09:30": 0, "10:00": 30 * time.Minute, "08:50": -10 * time.Minute} {
		v, _ := h.At(at(when)).Get()
		if v.Age != age || v.SDMs != Current.SDAt(0.05, age) {
			t.Errorf("at %s: age %v, error %v", when, v.Age, v.SDMs)
		}
	}
}

// A gust moves nothing.
func TestGustsAreOnlyShown(t *testing.T) {
	s := Sample{From: at("10:00"), Velocity: nav.BlowingFrom(240, 15), Source: Instrument}
	calm, err := NewWinds(s)
	if err != nil {
		t.Fatal(err)
	}
	s.GustMs = nav.Some(20.0)
	gusty, err := NewWinds(s)
	if err != nil {
		t.Fatal(err)
	}
	a, _ := calm.At(at("10:30")).Get()
	b, _ := gusty.At(at("10:30")).Get()
	if a.Velocity != b.Velocity || a.SDMs != b.SDMs || b.Sample.GustMs != s.GustMs {
		t.Errorf("with gusts %+v, without %+v", b, a)
	}
}

func TestRefusesSamples(t *testing.T) {
	good := flow("10:00", 90, 1, Person)
	for name, spoil := range map[string]func(*Sample){
		"no time":        func(s *Sample) { s.From = time.Time{} },
		"negative span":  func(s *Sample) { s.Over = -time.Second },
		"not a number":   func(s *Sample) { s.Velocity.EastMs = math.NaN() },
		"infinite":       func(s *Sample) { s.Velocity.NorthMs = math.Inf(1) },
		"too fast":       func(s *Sample) { s.Velocity = nav.Towards(0, 21) },
		"negative error": func(s *Sample) { s.SDMs = nav.Some(-0.1) },
		"endless error":  func(s *Sample) { s.SDMs = nav.Some(math.Inf(1)) },
		"no source":      func(s *Sample) { s.Source = "" },
	} {
		s := good
		spoil(&s)
		h := mustCurrents(t, good)
		err := h.Add(s)
		var field *FieldError
		if !errors.Is(err, ErrSample) || !errors.As(err, &field) || field.Expected == "" {
			t.Errorf("%s: error %v", name, err)
		}
		if h.Len() != 1 {
			t.Errorf("%s: the history was changed", name)
		}
		if _, err := NewCurrents(good, s); err == nil {
			t.Errorf("%s: taken by NewCurrents", name)
		}
	}
}

// drawSamples draws a history with observations and tables of whole minutes.
func drawSamples(t *rapid.T) []Sample {
	source := rapid.SampledFrom([]Source{Instrument, Person, Measured, Forecast, Tables})
	return rapid.SliceOfN(rapid.Custom(func(t *rapid.T) Sample {
		from := at("10:00").Add(time.Duration(rapid.IntRange(-300, 600).Draw(t, "minute")) * time.Minute)
		return Sample{
			From: from, Over: time.Duration(rapid.IntRange(0, 40).Draw(t, "over")) * time.Minute,
			Velocity: nav.Velocity{EastMs: rapid.Float64Range(-2, 2).Draw(t, "east"), NorthMs: rapid.Float64Range(-2, 2).Draw(t, "north")},
			Source:   source.Draw(t, "source"), Said: from,
		}
	}), 1, 12).Draw(t, "samples")
}

func TestOrderOfArrivalDoesNotMatter(t *testing.T) {
	rapid.Check(t, func(t *rapid.T) {
		samples := drawSamples(t)
		h := must(NewCurrents(samples...))
		shuffled := append([]Sample(nil), samples...)
		r := rand.New(rand.NewPCG(rapid.Uint64().Draw(t, "seed"), 0))
		r.Shuffle(len(shuffled), func(i, j int) { shuffled[i], shuffled[j] = shuffled[j], shuffled[i] })
		one := must(NewCurrents())
		for _, s := range append(shuffled, shuffled[0]) { // one comes twice
			if err := one.Add(s); err != nil {
				t.Fatal(err)
			}
		}
		for m := -400; m < 700; m += 7 {
			when := at("10:00").Add(time.Duration(m) * time.Minute)
			if a, b := h.At(when).Or(Value{}), one.At(when).Or(Value{}); a != b {
				t.Fatalf("at %v: %+v, want %+v", when, b, a)
			}
		}
	})
}

func must(h History, err error) History {
	if err != nil {
		panic(err)
	}
	return h
}

// Pieces leave no gap, and the mean is that of what held moment by moment.
func TestPiecesAndMean(t *testing.T) {
	rapid.Check(t, func(t *rapid.T) {
		h := must(NewCurrents(drawSamples(t)...))
		from := at("10:00").Add(time.Duration(rapid.IntRange(-400, 600).Draw(t, "from")) * time.Minute)
		to := from.Add(time.Duration(rapid.IntRange(1, 600).Draw(t, "minutes")) * time.Minute)
		begin := from
		for _, p := range h.Pieces(from, to) {
			if !p.From.Equal(begin) || !p.To.After(p.From) {
				t.Fatalf("piece %v to %v, want it from %v", p.From, p.To, begin)
			}
			begin = p.To
		}
		if !begin.Equal(to) {
			t.Fatalf("pieces end at %v, want %v", begin, to)
		}
		// All changes are on whole minutes, or a nanosecond after one: the middle
		// of each minute stands for it, exactly where what holds is a line.
		var sum nav.Velocity
		n := 0.0
		for m := from; m.Before(to); m = m.Add(time.Minute) {
			sum = sum.Add(h.At(m.Add(30 * time.Second)).Or(Value{}).Velocity)
			n++
		}
		want, got := sum.Scale(1/n), h.Mean(from, to).Or(Average{}).Velocity
		// Rounding of a few hundred sums of 2 m/s, and the nanoseconds.
		if got.Sub(want).SpeedMs() > 1e-9 {
			t.Fatalf("mean %v, want %v", got, want)
		}
	})
}

func TestMeanBackwardsIsAtTheMoment(t *testing.T) {
	h := mustCurrents(t, flow("10:00", 90, 1, Person), flow("11:00", 90, 2, Person))
	m, ok := h.Mean(at("10:30"), at("09:00")).Get()
	if !ok || m.Velocity != nav.Towards(90, 1) {
		t.Errorf("mean = %v, %v", m, ok)
	}
}

// A copy stays as it is.
func TestHistoryCopyIsSnapshot(t *testing.T) {
	h := mustCurrents(t, flow("10:00", 90, 1, Person))
	was := h
	for m := range 50 {
		s := flow("10:00", 90, 2, Person)
		s.From = s.From.Add(time.Duration(m) * time.Minute)
		s.Said = at("12:00")
		if err := h.Add(s); err != nil {
			t.Fatal(err)
		}
	}
	v, _ := was.At(at("10:30")).Get()
	if was.Len() != 1 || v.Velocity.SpeedKn() > 1.001 {
		t.Errorf("the copy has %d samples, now %v", was.Len(), v)
	}
	if got := len(h.Samples()); got != 51 {
		t.Errorf("%d samples listed, want all 51", got)
	}
}
