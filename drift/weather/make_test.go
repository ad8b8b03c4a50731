package weather

import (
	"errors"
	"math"
	"strings"
	"testing"
	"time"

	"pgregory.net/rapid"

	"wakeback/drift/nav"
)

func TestTrueWind(t *testing.T) {
	for _, c := range []struct {
		name     string
		relative nav.RelativeDeg
		kn       float64
		heading  nav.TrueDeg
		speedKn  float64
		from     float64
		wantKn   float64
	}{
		// Worked by hand from right-angled triangles.
		{"at anchor", 30, 12, 90, 0, 120, 12},
		{"running, wind from astern less own speed", 180, 6, 0, 6, 180, 12},
		{"motoring into it", 0, 18, 270, 6, 270, 12},
		{"felt on the beam at 3 and 4", -36.869897645844, 5, 0, 4, 270, 3},
		{"felt from ahead in a calm", 0, 6, 45, 6, -1, 0},
	} {
		t.Run(c.name, func(t *testing.T) {
			v := TrueWind(c.relative, c.kn*nav.MsPerKn, c.heading, nav.Towards(c.heading, c.speedKn))
			near(t, "kn", v.SpeedKn(), c.wantKn, 1e-9)
			if c.from >= 0 {
				dir, _ := v.Direction().Get()
				near(t, "from", float64(dir.Reciprocal()), c.from, 1e-6)
			}
		})
	}
}

func TestApparentWindUndoesTrueWind(t *testing.T) {
	rapid.Check(t, func(t *rapid.T) {
		heading := nav.TrueDeg(rapid.Float64Range(0, 359.9).Draw(t, "heading"))
		motion := nav.Towards(heading.Add(rapid.Float64Range(-10, 10).Draw(t, "leeway")), rapid.Float64Range(0, 15).Draw(t, "stw"))
		relative := nav.RelativeDeg(rapid.Float64Range(-179, 179).Draw(t, "relative"))
		ms := rapid.Float64Range(0.5, 40).Draw(t, "ms")
		r, s := ApparentWind(TrueWind(relative, ms, heading, motion), heading, motion)
		got, ok := r.Get()
		if !ok || math.Abs(s-ms) > 1e-9 || math.Abs(nav.NormSignedDeg(float64(got-relative))) > 1e-6 {
			t.Fatalf("got %v at %v, want %v at %v", got, s, relative, ms)
		}
	})
	if r, s := ApparentWind(nav.Velocity{EastMs: 3}, 90, nav.Velocity{EastMs: 3}); r.IsSet() || s != 0 {
		t.Errorf("a wind felt from %v at %v where there is none", r, s)
	}
}

// On reciprocal courses a wrong log and a wrong compass cancel to first order.
func TestReciprocalMeanCancelsBias(t *testing.T) {
	current := nav.Towards(130, 1.1)
	measure := func(heading nav.TrueDeg) Measurement {
		ground := nav.Towards(heading, 6).Add(current)
		cog, _ := ground.Direction().Get()
		return mustSet(t, Underway{CogTrue: cog, SogKn: ground.SpeedKn(), Heading: heading.Add(4), StwKn: 6.3})
	}
	out, back := measure(20), measure(200)
	near(t, "each is out by", out.Velocity.Sub(current).SpeedKn(), math.Hypot(0.3, 6.15*4*math.Pi/180), 0.02)
	mean := ReciprocalMean(out, back)
	near(t, "the mean is out by", mean.Velocity.Sub(current).SpeedKn(), 0, 1e-9)
	near(t, "its variance", mean.Cov.EE, (out.Cov.EE+back.Cov.EE)/4, 1e-15)
}

// The covariance from direction and speed, against many drawn by hand: the
// quantiles of a normal distribution, evenly.
func TestPolarCovIsSmallErrorLimit(t *testing.T) {
	v := nav.Towards(70, 5)
	cov := PolarCov(v, 0.01, 0.2)
	var ee, nn, en, n float64
	const steps = 60
	for i := range steps {
		for j := range steps {
			z1, z2 := math.Sqrt2*math.Erfinv((2*float64(i)+1)/steps-1), math.Sqrt2*math.Erfinv((2*float64(j)+1)/steps-1)
			w := nav.Towards(70+nav.TrueDeg(0.2*z1), (v.SpeedMs()+0.01*z2)/nav.MsPerKn).Sub(v)
			ee, nn, en, n = ee+w.EastMs*w.EastMs, nn+w.NorthMs*w.NorthMs, en+w.EastMs*w.NorthMs, n+1
		}
	}
	// 60 even quantiles hold 98.7 % of a normal variance.
	tol := 0.02 * (cov.EE + cov.NN)
	near(t, "EE", ee/n, cov.EE, tol)
	near(t, "NN", nn/n, cov.NN, tol)
	near(t, "EN", en/n, cov.EN, tol)
	if c := PolarCov(nav.Velocity{}, 0.1, 3); math.Abs(c.EE-0.01) > 1e-15 || c.EN != 0 {
		t.Errorf("at rest %v", c)
	}
}

func TestMeasurementsRefuse(t *testing.T) {
	if _, err := SetAndDrift(Underway{CogTrue: 90, SogKn: 1, Heading: 90, StwKn: 1}); !errors.Is(err, ErrTooSlow) {
		t.Errorf("at a crawl: %v", err)
	}
	if _, err := SetAndDrift(Underway{CogTrue: 90, SogKn: math.NaN(), Heading: 90, StwKn: 6}); !errors.Is(err, ErrSample) {
		t.Errorf("no speed over the ground: %v", err)
	}
	p := nav.PositionFromDegrees(50, -1)
	a := nav.Fix{At: at("10:00"), Position: p}
	for name, b := range map[string]nav.Fix{
		"too short":    {At: at("10:04"), Position: p},
		"backwards":    {At: at("09:00"), Position: p},
		"not anywhere": {At: at("11:00"), Position: nav.PositionFromDegrees(91, 0)},
	} {
		if _, err := DriftOf(a, b); err == nil {
			t.Errorf("%s is taken", name)
		}
	}
	for _, tide := range []Tide{{4, 5, 5}, {4, 5, 2.4}, {-1, 2.4, 5}, {math.NaN(), 2.4, 5}, {math.Inf(1), 2.4, 5}} {
		if _, err := (Stream{90, 1, 2}).Velocity(tide); !errors.Is(err, ErrTide) {
			t.Errorf("%v: %v", tide, err)
		}
	}
	if v, err := (Stream{90, 0.1, 2}).Velocity(Tide{0.1, 2.4, 5}); err != nil || v != (nav.Velocity{}) {
		t.Errorf("below neaps far enough: %v, %v, want slack", v, err)
	}
}

// What a marker watched tells: its drift less its leeway, with both errors.
func TestCurrentFromMarker(t *testing.T) {
	p := nav.PositionFromDegrees(50, -1)
	a := nav.Fix{At: at("10:00"), Position: p, ErrorM: nav.Some(20.0)}
	b := nav.Fix{At: at("10:30"), Position: p.Shift(nav.Along(100, 900)), ErrorM: nav.Some(20.0)}
	drift, err := DriftOf(a, b)
	if err != nil {
		t.Fatal(err)
	}
	near(t, "drift, m/s", drift.Velocity.SpeedMs(), 0.5, 1e-6)
	sd := 20 / 2.447747 * math.Sqrt2 / 1800
	near(t, "its error", drift.Cov.SDMs(), sd, 1e-6)
	c := CurrentFromMarker(drift, nav.Velocity{EastMs: 0.1}, 0.05)
	near(t, "current east", c.Velocity.EastMs, drift.Velocity.EastMs-0.1, 1e-12)
	near(t, "its error", c.Cov.SDMs(), math.Hypot(sd, 0.05), 1e-6)
	s := c.Sample(a.At, 30*time.Minute, Measured, "dan buoy")
	if err := s.Validate(Current); err != nil || !s.End().Equal(b.At) {
		t.Errorf("sample %+v: %v", s, err)
	}
}

// Never counted twice is the caller's to keep; here only that the rule turns
// with the hemisphere, by nothing on the equator, and shows more error than an
// observation.
func TestWindDriven(t *testing.T) {
	wind := nav.BlowingFrom(0, 20)
	for lat, want := range map[float64]float64{60: 190, -60: 170, 0: 180} {
		v, sd := WindDriven(wind, lat)
		near(t, "towards", float64(v.Direction().Or(-1)), want, 1e-9)
		if sd <= Current.DefaultSDMs(Person) {
			t.Errorf("error %v, less than an observation's", sd)
		}
	}
	for _, lat := range []float64{0, 5, -9.9, 95, math.NaN()} {
		if Ekman(wind, lat).IsSet() {
			t.Errorf("Ekman at %v", lat)
		}
	}
}

func TestParseCSV(t *testing.T) {
	const text = "\ufeff# from the harbour office\nTime;Wind_From_Deg;Wind_Speed_Kn;Gust_Kn;pressure\n" +
		"2026-06-01T10:00:00Z;240;15;22;1012\n\n2026-06-01T13:00:00+02:00;360;20;;1011\n"
	got, err := ParseCSV(text, Wind, Forecast, "harbour office", at("09:00"))
	if err != nil || len(got) != 2 {
		t.Fatalf("%v, %v", got, err)
	}
	dir, _ := got[0].Velocity.Direction().Get()
	near(t, "from", float64(dir.Reciprocal()), 240, 1e-9)
	near(t, "gust", got[0].GustMs.Or(0), 22*nav.MsPerKn, 1e-9)
	if !got[1].From.Equal(at("11:00")) || got[1].GustMs.IsSet() || got[1].Name != "harbour office" {
		t.Errorf("second %+v", got[1])
	}
	stream, err := ParseCSV("time,set_deg,drift_kn,sd_kn\n2026-06-01T10:00:00Z,\"090\",1.8,0.3", Current, Tables, "", at("09:00"))
	if err != nil || len(stream) != 1 {
		t.Fatalf("%v, %v", stream, err)
	}
	near(t, "sd", stream[0].SDMs.Or(0), 0.3*nav.MsPerKn, 1e-12)
}

func TestParseCSVRefuses(t *testing.T) {
	const head = "time,wind_from_deg,wind_speed_kn,gust_kn\n"
	for _, c := range []struct {
		name, text, field string
		line              int
	}{
		{"nothing", "", "text", 0},
		{"only names", head, "text", 0},
		{"no column names", "2026-06-01T10:00:00Z,240,15\n", "column names", 1},
		{"names of the stream", "time,set_deg,drift_kn\n", "column names", 1},
		{"a column short", head + "2026-06-01T10:00:00Z,240\n", "row", 2},
		{"no zone", head + "2026-06-01T10:00:00,240,15,\n", "time", 2},
		{"no direction", head + "2026-06-01T10:00:00Z,,15,\n", "wind_from_deg", 2},
		{"direction over 360", head + "\n2026-06-01T10:00:00Z,361,15,\n", "wind_from_deg", 3},
		{"magnetic", head + "2026-06-01T10:00:00Z,240M,15,\n", "wind_from_deg", 2},
		{"negative speed", head + "2026-06-01T10:00:00Z,240,-15,\n", "wind_speed_kn", 2},
		{"metres per second", head + "2026-06-01T10:00:00Z,240,8m/s,\n", "wind_speed_kn", 2},
		{"gust in words", head + "2026-06-01T10:00:00Z,240,15,strong\n", "gust_kn", 2},
		{"long line", head + strings.Repeat("x", 600), "text", 2},
	} {
		t.Run(c.name, func(t *testing.T) {
			got, err := ParseCSV(c.text, Wind, Forecast, "", at("09:00"))
			var field *FieldError
			if got != nil || !errors.As(err, &field) || field.Field != c.field || field.Line != c.line {
				t.Errorf("%v, %v; want field %s in line %d", got, err, c.field, c.line)
			}
		})
	}
	row := "2026-06-01T10:00:00Z,240,15,\n"
	if _, err := ParseCSV(head+strings.Repeat(row, 2000), Wind, Forecast, "", at("09:00")); err == nil {
		t.Error("2000 rows are taken")
	}
	if _, err := ParseCSV("time,set_deg,drift_kn\n2026-06-01T10:00:00Z,90,30", Current, Tables, "", at("09:00")); err == nil {
		t.Error("a stream of 30 kn is taken")
	}
}

// What is taken can be put into a history; nothing makes it fail or crash.
func FuzzParseCSV(f *testing.F) {
	f.Add("time,wind_from_deg,wind_speed_kn\n2026-06-01T10:00:00Z,240,15\n", false)
	f.Add("time;set_deg;drift_kn;sd_kn\n2026-06-01T10:00:00Z;090;1.8;0.3", true)
	f.Add("\ufefftime\tfrom\tkn\tgust_kn\n2026-06-01T10:00:00+01:00\t360\t0\t\n# end", false)
	f.Add("at,\"set\",rate_kn\n\n,,\n", true)
	f.Fuzz(func(t *testing.T, text string, water bool) {
		m := Wind
		if water {
			m = Current
		}
		samples, err := ParseCSV(text, m, Forecast, "fuzz", at("09:00"))
		if err != nil {
			var field *FieldError
			if !errors.As(err, &field) || samples != nil || field.Expected == "" {
				t.Fatalf("error %v with %d samples", err, len(samples))
			}
			return
		}
		h, err := newHistory(m, samples)
		if err != nil {
			t.Fatal(err)
		}
		if v, ok := h.At(at("10:30")).Get(); !ok || math.IsNaN(v.Velocity.SpeedMs()) || !(v.SDMs > 0 || v.Sample.SDMs.IsSet()) {
			t.Fatalf("value %+v", v)
		}
	})
}

func TestHourlyStreams(t *testing.T) {
	tide := Tide{RangeM: 5, NeapRangeM: 2.4, SpringRangeM: 5}
	got, err := HourlyStreams(at("12:00"), -1, []Stream{{80, 0.5, 1.2}, {80, 0, 0}, {260, 0.4, 1}}, tide, "atlas")
	if err != nil || len(got) != 3 {
		t.Fatal(got, err)
	}
	h := mustCurrents(t, got...)
	for when, kn := range map[string]float64{"11:00": 1.2, "11:30": 0.6, "12:00": 0, "12:30": 0.5, "13:00": 1} {
		v, _ := h.At(at(when)).Get()
		near(t, "kn at "+when, v.Velocity.SpeedKn(), kn, 1e-9)
	}
	if _, err := HourlyStreams(at("12:00"), -1, []Stream{{80, 0.5, 1.2}}, Tide{}, ""); !errors.Is(err, ErrTide) {
		t.Errorf("no ranges: %v", err)
	}
}

func TestMeanOf(t *testing.T) {
	wind := func(when string, from nav.TrueDeg, kn float64) Sample {
		return Sample{From: at(when), Velocity: nav.BlowingFrom(from, kn), Source: Instrument, Name: "masthead", Said: at(when)}
	}
	bad := wind("10:02", 0, 10)
	bad.Velocity.EastMs = math.NaN()
	got, ok := MeanOf(Wind, []Sample{wind("10:05", 350, 10), bad, wind("10:00", 10, 10), wind("10:03", 0, 16)}).Get()
	if !ok || !got.From.Equal(at("10:00")) || got.Over != 5*time.Minute || !got.Said.Equal(at("10:05")) {
		t.Fatalf("%+v, %v", got, ok)
	}
	dir, _ := got.Velocity.Direction().Get()
	near(t, "from", nav.NormSignedDeg(float64(dir.Reciprocal())), 0, 1e-9) // across north, not 120
	near(t, "speed, kn", got.Velocity.SpeedKn(), (16+20*math.Cos(10*math.Pi/180))/3, 1e-9)
	near(t, "gust, kn", got.GustMs.Or(0)/nav.MsPerKn, 16, 1e-9)
	if MeanOf(Wind, []Sample{bad}).IsSet() {
		t.Error("a mean of nothing")
	}
	if err := got.Validate(Wind); err != nil {
		t.Error(err)
	}
}

// A history of two days of a wind a minute is made and read in passing.
func TestLongHistory(t *testing.T) {
	h := must(NewWinds())
	for m := range 48 * 60 {
		s := Sample{From: at("00:00").Add(time.Duration(m) * time.Minute), Velocity: nav.BlowingFrom(nav.TrueDeg(m%360), 15), Source: Instrument}
		if err := h.Add(s); err != nil {
			t.Fatal(err)
		}
	}
	pieces := h.Pieces(at("10:00"), at("20:00"))
	if len(pieces) != 600 {
		t.Errorf("%d pieces, want one a minute", len(pieces))
	}
	// Two minutes of two days look at a few samples only.
	if n := testing.AllocsPerRun(10, func() { h.Mean(at("12:00"), at("12:02")) }); n > 20 {
		t.Errorf("%v allocations for two minutes", n)
	}
}
