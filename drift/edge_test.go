package drift_test

import (
	"errors"
	"math"
	"strings"
	"testing"
	"time"

	"pgregory.net/rapid"

	"wakeback/drift"
	"wakeback/drift/nav"
	"wakeback/drift/weather"
)

// Scenario 29: a clue narrows the window; the case is the same with other times.
func TestScenario29ClueNarrows(t *testing.T) {
	begin := position(t, "50N 001W")
	var fixes []nav.Fix
	for m := 0; m <= 255; m += 5 {
		fixes = append(fixes, nav.Fix{At: clock("00:00").Add(time.Duration(m) * time.Minute), Position: begin.Shift(nav.Along(270, float64(m)/60*6*nav.MetresPerNM))})
	}
	c := drift.Case{
		Start: drift.Start{Path: nav.NewTrack(fixes)}, FellFrom: clock("02:10"), FellTo: clock("04:00"), Class: class(t, "person"),
		Winds: winds(t, windFrom(clock("00:00"), 0, 0)), Currents: currents(t, currentFrom(clock("00:00"), 180, 1.2)),
	}
	d := datumAt(t, c, clock("04:15"))
	first, last := d.Ends()
	a, b := first.Or(drift.Drifted{}), last.Or(drift.Drifted{})
	near(t, "track left, NM", nav.Inverse(a.From, b.From).RangeM/nav.MetresPerNM, 11, 0.005)
	if d.Point.IsSet() {
		t.Error("a corridor shown as one point")
	}
	cl := cloudAt(t, c, drift.Options{Members: 4000, Seed: 1}, clock("04:15"))
	whole := c
	whole.FellFrom = clock("00:00")
	wide := cloudAt(t, whole, drift.Options{Members: 4000, Seed: 1}, clock("04:15"))
	if a, b := cl.Spread(), wide.Spread(); !(a.SDMajorM < b.SDMajorM/2) {
		t.Errorf("narrowed %v m, whole %v m", a.SDMajorM, b.SDMajorM)
	}
}

// Each member of a corridor leaves at its own time: along the track the spread
// is that of an even line, across it that of the drift of even ages.
func TestCorridorClosedForm(t *testing.T) {
	begin := position(t, "0N 001W") // on the equator the track is straight and east in any plane
	at := clock("00:00")
	length := 24 * nav.MetresPerNM
	path := nav.NewTrack([]nav.Fix{
		{At: at, Position: begin, ErrorM: nav.Some(0.0)},
		{At: at.Add(4 * time.Hour), Position: begin.Shift(nav.Along(90, length)), ErrorM: nav.Some(0.0)},
	})
	c := drift.Case{
		Start: drift.Start{Path: path}, FellFrom: at, FellTo: at.Add(4 * time.Hour), Class: drift.Class{ID: "none"},
		Winds: winds(t, windFrom(at, 0, 0)), Currents: currents(t, steady(at, 48*time.Hour, nav.Towards(0, 1.2), 0)...),
	}
	meanE, meanN, sdE, sdN, corr := pooled(t, c, drift.Model{}, at.Add(4*time.Hour+15*time.Minute+17*time.Second))
	drifted := 1.2 * 4 * nav.MetresPerNM
	age := 2.25 + 17.0/3600
	near(t, "mean along, from the middle", meanE, 0, meanTol(length/math.Sqrt(12))+1)
	near(t, "mean across", meanN, 1.2*age*nav.MetresPerNM, meanTol(drifted/math.Sqrt(12))+1)
	// The standard deviation of an even spread has less sampling error than that
	// of a normal one.
	near(t, "SD along", sdE, length/math.Sqrt(12), sdTol(length/math.Sqrt(12)))
	near(t, "SD across", sdN, drifted/math.Sqrt(12), sdTol(drifted/math.Sqrt(12)))
	near(t, "correlation: who fell first drifted longest", corr, -1, 1e-3)
}

// Nobody moves before they fell.
func TestNobodyDriftsBeforeTheFall(t *testing.T) {
	at := clock("10:00")
	c := openWater(t, class(t, "person"), nav.BlowingFrom(240, 20), nav.Towards(90, 2), 1, 0.1)
	for _, when := range []time.Time{at, at.Add(-time.Second), at.Add(-48 * time.Hour)} {
		d := datumAt(t, c, when)
		if p, ok := d.Point.Get(); !ok || !d.BeforeFall || d.Shift != (nav.Offset{}) || p != c.Start.Position {
			t.Errorf("at %v: %+v", when, d)
		}
		if s := cloudAt(t, c, drift.Options{Members: 100, Seed: 1}, when).Spread(); s.R95M != 0 {
			t.Errorf("at %v the cloud has spread to %v m", when, s.R95M)
		}
	}
	// A mark in the future is a mark: nothing drifts until then.
	c.FellFrom, c.FellTo = at.Add(time.Hour), at.Add(time.Hour)
	if d := datumAt(t, c, at); !d.BeforeFall || !strings.Contains(strings.Join(d.Cautions, " "), "not after the fall") {
		t.Errorf("a mark in the future: %v", d.Cautions)
	}
}

// Time that runs backwards gives what was there then.
func TestTimeRunsBackwards(t *testing.T) {
	c := benchCase(t)
	o := drift.Options{Members: 300, Seed: 5}
	there := cloudAt(t, c, o, clock("11:17"))
	back := cloudAt(t, c, o, clock("13:00"))
	if err := back.Advance(clock("11:17")); err != nil {
		t.Fatal(err)
	}
	samePoints(t, back, there)
	if err := back.Advance(c.FellFrom.Add(-time.Hour)); err != nil || !back.At().Equal(c.FellFrom) {
		t.Errorf("before the fall: at %v, %v", back.At(), err)
	}
}

func samePoints(t testing.TB, a, b *drift.Cloud) {
	t.Helper()
	ae, an := a.Points()
	be, bn := b.Points()
	for i := range ae {
		if ae[i] != be[i] || an[i] != bn[i] {
			t.Fatalf("member %d is at %v %v, and at %v %v", i, ae[i], an[i], be[i], bn[i])
		}
	}
}

// However the way is divided, the cloud is the same to the last bit.
func TestCloudDoesNotDependOnChunks(t *testing.T) {
	rapid.Check(t, func(r *rapid.T) {
		c := benchCase(t)
		c.FellTo = c.FellFrom.Add(time.Duration(rapid.IntRange(0, 7200).Draw(r, "window")) * time.Second)
		o := drift.Options{Members: 40, Seed: rapid.Uint64().Draw(r, "seed")}
		end := c.FellFrom.Add(5*time.Hour + 13*time.Second)
		once := cloudAt(t, c, o, end)
		parts, err := drift.NewCloud(c, o)
		if err != nil {
			r.Fatal(err)
		}
		for at := c.FellFrom; at.Before(end); at = at.Add(time.Duration(rapid.IntRange(1, 4000).Draw(r, "s")) * time.Second) {
			if err := parts.Advance(at); err != nil {
				r.Fatal(err)
			}
		}
		if err := parts.Advance(end); err != nil {
			r.Fatal(err)
		}
		samePoints(t, parts, once)
	})
}

// The cloud goes on from where it is unless an input about the past changes.
func TestCloudIsRebuiltForThePastOnly(t *testing.T) {
	c := benchCase(t)
	o := drift.Options{Members: 200, Seed: 9}
	cl := cloudAt(t, c, o, clock("11:30"))
	later := c
	later.Winds = winds(t, append(c.Winds.Samples(), windFrom(clock("11:45"), 300, 25))...)
	if rebuilt, err := cl.Update(later); err != nil || rebuilt {
		t.Errorf("a wind of the future: rebuilt %v, %v", rebuilt, err)
	}
	if err := cl.Advance(clock("12:30")); err != nil {
		t.Fatal(err)
	}
	samePoints(t, cl, cloudAt(t, later, o, clock("12:30")))
	past := later
	past.Currents = currents(t, append(c.Currents.Samples(), currentFrom(clock("10:40"), 60, 2))...)
	if rebuilt, err := cl.Update(past); err != nil || !rebuilt {
		t.Errorf("a current of the past: rebuilt %v, %v", rebuilt, err)
	}
	samePoints(t, cl, cloudAt(t, past, o, clock("12:30")))
	bad := past
	bad.FellTo = time.Time{}
	if _, err := cl.Update(bad); !errors.Is(err, drift.ErrCase) {
		t.Errorf("a bad case: %v", err)
	}
	samePoints(t, cl, cloudAt(t, past, o, clock("12:30")))
}

// Zero forcing leaves the members where the start put them.
func TestNothingMovesNothing(t *testing.T) {
	c := openWater(t, class(t, "person"), nav.Velocity{}, nav.Velocity{}, 0, 0)
	c.Start.Error95M = nav.Some(500.0)
	o := drift.Options{Members: 500, Seed: 2}
	samePoints(t, cloudAt(t, c, o, c.FellFrom), cloudAt(t, c, o, c.FellFrom.Add(9*time.Hour)))
	if d := datumAt(t, c, clock("19:00")); d.Shift.RangeM() != 0 || d.Leeway.Range != drift.NoWind || d.Left.IsSet() {
		t.Errorf("datum %+v", d)
	}
}

// A wind over those of the trials is carried on, not cut off, and said.
func TestWindOverTrials(t *testing.T) {
	p := class(t, "person")
	c := openWater(t, p, nav.BlowingFrom(0, 60), nav.Velocity{}, 1, 0.1)
	d := datumAt(t, c, clock("11:00"))
	near(t, "leeway, kn", d.Leeway.Downwind.SpeedKn(), 0.011*60+0.07, 1e-9)
	if d.Leeway.Range != drift.RangeAbove || !strings.Contains(strings.Join(d.Cautions, " "), "above the winds of the trials") {
		t.Errorf("range %q, cautions %q", d.Leeway.Range, d.Cautions)
	}
	p.WindMinMs, p.WindMaxMs = nav.Some(3.0), nav.Some(12.0)
	for ms, want := range map[float64]drift.WindRange{0: drift.NoWind, 2: drift.RangeBelow, 3: drift.InRange, 12: drift.InRange, 12.1: drift.RangeAbove} {
		if got := p.RangeOf(ms); got != want {
			t.Errorf("RangeOf(%v) = %q, want %q", ms, got, want)
		}
	}
}

// What is not known is not nought: it makes the error larger, and is said.
func TestNotKnownIsNotCalm(t *testing.T) {
	at := clock("10:00")
	known := openWater(t, class(t, "person"), nav.BlowingFrom(0, 0), nav.Velocity{}, 0, 0.05)
	known.Start.Error95M = nav.Some(30.0)
	blind := drift.Case{Start: known.Start, FellFrom: at, FellTo: at, Class: known.Class}
	a, b := datumAt(t, known, clock("12:00")), datumAt(t, blind, clock("12:00"))
	if !(b.TotalProbableErrorM > 2*a.TotalProbableErrorM) || b.Errors.WindM == 0 || b.Errors.CurrentM == 0 {
		t.Errorf("known %+v, blind %+v", a.Errors, b.Errors)
	}
	if text := strings.Join(b.Cautions, " "); !strings.Contains(text, "No wind is known") || !strings.Contains(text, "No current is known") {
		t.Errorf("cautions %q", b.Cautions)
	}
	near(t, "datum stays", b.Shift.RangeM(), 0, 0)
	if s := cloudAt(t, blind, drift.Options{Seed: 1}, clock("12:00")).Spread(); !(s.R95M > 1000) {
		t.Errorf("the cloud is only %v m wide", s.R95M)
	}
}

// Across the antimeridian and near a pole, range and bearing from the start are
// those of anywhere else: the plane knows no seam.
func TestAnywhereOnEarth(t *testing.T) {
	at := clock("10:00")
	for name, p := range map[string]nav.Position{
		"antimeridian": nav.PositionFromDegrees(-17, 179.999),
		"85 N":         nav.PositionFromDegrees(85, 30),
		"the pole":     nav.PositionFromDegrees(90, 0),
		"south":        nav.PositionFromDegrees(-60, -64),
	} {
		t.Run(name, func(t *testing.T) {
			c := drift.Case{
				Start: drift.Start{Position: p}, FellFrom: at, FellTo: at, Class: class(t, "person"),
				Winds: winds(t, windFrom(at, 240, 15)), Currents: currents(t, currentFrom(at, 100, 1.2)),
			}
			d := datumAt(t, c, clock("12:00"))
			to, ok := d.Point.Get()
			if !ok || to.Validate() != nil {
				t.Fatalf("datum %v", to)
			}
			line := nav.Inverse(p, to)
			near(t, "range, NM", line.RangeM/nav.MetresPerNM, 2.7765, 0.00005)
			if p.LatDeg() < 90 { // at the pole every bearing is south
				near(t, "bearing", float64(line.Bearing.Or(-1)), 93.75, 0.005)
			}
			s := cloudAt(t, c, drift.Options{Members: 500, Seed: 4}, clock("12:00")).Spread()
			if off := nav.Inverse(s.MeanPosition, to).RangeM; !(off < 3*s.R50M) {
				t.Errorf("the cloud's mean lies %v m off", off)
			}
		})
	}
}

// wall is a straight coast: land east of a line.
type wall struct{ eastM float64 }

func (w wall) In(nav.Plane) func(e, n float64) bool {
	return func(e, _ float64) bool { return e >= w.eastM }
}
func (w wall) Fingerprint() uint64 { return math.Float64bits(w.eastM) }

// Members that come to a coast stay there and are counted: with a persisting
// error across it, the share is that of the normal distribution.
func TestStranding(t *testing.T) {
	c := openWater(t, drift.Class{ID: "none"}, nav.Velocity{}, nav.Velocity{EastMs: 0.5}, 0, 0.25)
	c.Coast = wall{3600}
	ashore, n := 0.0, 0.0
	for seed := range uint64(10) {
		cl := cloudAt(t, c, drift.Options{Members: 2000, Seed: seed, Model: drift.Model{Persisting: nav.Some(1.0)}}, clock("12:00"))
		east, _ := cl.Points()
		for _, e := range east {
			if e >= 3600 {
				// It stays where it struck: at most a step of 60 s at 2 m/s inland.
				near(t, "place ashore", e, 3600+60, 60)
			}
		}
		ashore += float64(cl.Ashore())
		n += float64(cl.N())
	}
	// v T - q = 0 at two hours: half of them, four standard errors of a coin.
	near(t, "share ashore", ashore/n, 0.5, 4*0.5/math.Sqrt(n))
}

// A start the coast calls land: the coast or the mark is wrong, not the fall,
// so members drift until they have been afloat.
func TestStartOnLand(t *testing.T) {
	c := openWater(t, drift.Class{ID: "none"}, nav.Velocity{}, nav.Velocity{EastMs: -0.5}, 0, 0)
	c.Start.Error95M = nav.Some(100.0)
	c.Coast = wall{-1000}
	cl := cloudAt(t, c, drift.Options{Members: 500, Seed: 3}, clock("10:30"))
	s := cl.Spread()
	near(t, "ashore", float64(s.Ashore), 0, 0)
	near(t, "moved", s.Mean.EastM, -900, 20)
	if err := cl.Advance(clock("12:00")); err != nil {
		t.Fatal(err)
	}
	near(t, "moved through and on", cl.Spread().Mean.EastM, -3600, 20)
	turned := c
	turned.Currents = currents(t, append(c.Currents.Samples(), weather.Sample{From: clock("11:30"), Over: 5 * time.Hour, Velocity: nav.Velocity{EastMs: 0.5}, SDMs: nav.Some(0.0), Source: weather.Measured})...)
	if _, err := cl.Update(turned); err != nil {
		t.Fatal(err)
	}
	if err := cl.Advance(clock("14:00")); err != nil {
		t.Fatal(err)
	}
	if cl.Ashore() != cl.N() {
		t.Errorf("%d of %d came back to the coast", cl.Ashore(), cl.N())
	}
}

func TestRefusesCases(t *testing.T) {
	good := benchCase(t)
	for name, spoil := range map[string]func(*drift.Case){
		"no time":          func(c *drift.Case) { c.FellFrom = time.Time{} },
		"times reversed":   func(c *drift.Case) { c.FellTo = c.FellFrom.Add(-time.Second) },
		"endless window":   func(c *drift.Case) { c.FellTo = c.FellFrom.Add(1000 * time.Hour) },
		"no position":      func(c *drift.Case) { c.Start.Position = nav.PositionFromDegrees(math.NaN(), 0) },
		"negative error":   func(c *drift.Case) { c.Start.Error95M = nav.Some(-1.0) },
		"no class":         func(c *drift.Case) { c.Class = drift.Class{} },
		"sailing class":    func(c *drift.Case) { c.Class.Slope = 0.9 },
		"winds as current": func(c *drift.Case) { c.Currents = c.Winds },
		"current as winds": func(c *drift.Case) { c.Winds = c.Currents },
		"path round the world": func(c *drift.Case) {
			c.FellFrom, c.FellTo = clock("08:00"), clock("12:00")
			c.Start.Path = nav.NewTrack([]nav.Fix{{At: clock("08:00"), Position: nav.PositionFromDegrees(0, 0)}, {At: clock("12:00"), Position: nav.PositionFromDegrees(0, 90)}})
		},
	} {
		c := good
		spoil(&c)
		if _, err := drift.DatumAt(c, clock("12:00")); !errors.Is(err, drift.ErrCase) {
			t.Errorf("%s: datum error %v", name, err)
		}
		if _, err := drift.NewCloud(c, drift.Options{}); !errors.Is(err, drift.ErrCase) {
			t.Errorf("%s: cloud error %v", name, err)
		}
	}
	if _, err := drift.DatumAt(good, clock("10:00").Add(1000*time.Hour)); !errors.Is(err, drift.ErrCase) {
		t.Errorf("40 days later: %v", err)
	}
	cl := cloudAt(t, good, drift.Options{Members: 10}, clock("10:00"))
	if err := cl.Advance(clock("10:00").Add(1000 * time.Hour)); !errors.Is(err, drift.ErrCase) {
		t.Errorf("40 days later: %v", err)
	}
	for name, o := range map[string]drift.Options{
		"members":     {Members: -1},
		"too many":    {Members: drift.MaxMembers + 1},
		"share":       {Model: drift.Model{Persisting: nav.Some(1.5)}},
		"correlation": {Model: drift.Model{Correlation: -time.Hour}},
		"step":        {Model: drift.Model{Step: time.Hour}},
	} {
		if _, err := drift.NewCloud(good, o); !errors.Is(err, drift.ErrOptions) || !errors.Is(err, drift.ErrCase) {
			t.Errorf("%s: %v", name, err)
		}
	}
}

func TestClassNames(t *testing.T) {
	for _, id := range []string{"life-ring", "dan-buoy"} {
		if _, err := drift.ClassByID(id); !errors.Is(err, drift.ErrClass) || !strings.Contains(err.Error(), "no leeway is published") {
			t.Errorf("%s: %v", id, err)
		}
	}
	if _, err := drift.ClassByID("submarine"); !errors.Is(err, drift.ErrClass) {
		t.Errorf("submarine: %v", err)
	}
	for _, w := range []drift.Wearing{drift.WearingUnknown, drift.Clothes, drift.BuoyancyVest, drift.LifeJacket, drift.SurvivalSuit, drift.DivingSuit, "a hat", ""} {
		for _, m := range []drift.Moving{drift.MovingUnknown, drift.IsMoving, drift.IsNotMoving, ""} {
			c := drift.Choose(w, m)
			if class(t, c.ClassID).ID == "" || c.Why == "" {
				t.Errorf("Choose(%q, %q) = %+v", w, m, c)
			}
		}
	}
	if got := drift.Choose(drift.WearingUnknown, drift.MovingUnknown).ClassID; got != drift.DefaultClass {
		t.Errorf("nothing known: %q", got)
	}
}

// The wind-driven current is never added to a current that was observed.
func TestWindDrivenIsNotCountedTwice(t *testing.T) {
	at := clock("10:00")
	base := drift.Case{
		Start: drift.Start{Position: position(t, "50N 001W")}, FellFrom: at, FellTo: at, Class: drift.Class{ID: "none"},
		Winds: winds(t, windFrom(at, 270, 20)), WindDriven: true,
	}
	table := currentFrom(at, 0, 1)
	table.Source = weather.Tables
	for _, c := range []struct {
		name     string
		currents weather.History
		eastKn   float64
	}{
		{"nothing observed", weather.History{}, 0.6 * math.Cos(10*math.Pi/180)},
		{"a table", currents(t, table), 0.6 * math.Cos(10*math.Pi/180)},
		{"observed", currents(t, currentFrom(at, 0, 1)), 0},
	} {
		t.Run(c.name, func(t *testing.T) {
			fall := base
			fall.Currents = c.currents
			d := datumAt(t, fall, clock("12:00"))
			near(t, "east, NM", d.Shift.EastM/nav.MetresPerNM, 2*c.eastKn, 1e-6)
			s := cloudAt(t, fall, drift.Options{Members: 4000, Seed: 8, Model: drift.Model{Persisting: nav.Some(1.0)}}, clock("12:00")).Spread()
			near(t, "the cloud's mean east", s.Mean.EastM, d.Shift.EastM, 4*s.SDMajorM/math.Sqrt(4000))
			near(t, "the cloud's mean north", s.Mean.NorthM, d.Shift.NorthM, 4*s.SDMajorM/math.Sqrt(4000))
		})
	}
}

// Memory stays flat over 48 h.
func TestMemoryIsFlat(t *testing.T) {
	c := benchCase(t)
	cl := cloudAt(t, c, drift.Options{Members: 50, Seed: 1}, clock("11:00"))
	at := clock("11:00")
	allocated := testing.AllocsPerRun(47*60, func() {
		at = at.Add(time.Minute)
		if err := cl.Advance(at); err != nil {
			t.Fatal(err)
		}
	})
	// Only the minutes in which a sample takes over from another allocate.
	if allocated >= 1 {
		t.Errorf("%v allocations a minute", allocated)
	}
}

func TestColdWater(t *testing.T) {
	for _, c := range []struct {
		tempC     float64
		f         drift.Flotation
		state     drift.WaterState
		low, high float64 // minutes of survival over all tables; -1 for open
	}{
		{-2, drift.FlotationNone, drift.WaterInTables, 0, 60},
		{8, drift.FlotationNone, drift.WaterInTables, 60, 216 + 0.6*126},
		{10, drift.FlotationWorn, drift.WaterInTables, 60, -1},
		{25, drift.FlotationNone, drift.WaterInTables, 180, -1},
		{40, drift.FlotationNone, drift.WaterTooWarm, 0, 0},
		{-5, drift.FlotationNone, drift.WaterTooCold, 0, 0},
		{math.NaN(), drift.FlotationNone, drift.WaterUnknown, 0, 0},
	} {
		w, err := drift.ColdWaterAt(c.tempC, c.f)
		if err != nil {
			t.Fatal(err)
		}
		if w.State != c.state || len(w.Texts) == 0 || !strings.HasPrefix(w.Texts[0], "Keep searching") {
			t.Errorf("%v °C: state %q, texts %q", c.tempC, w.State, w.Texts)
		}
		b, ok := w.Survival.Get()
		if ok != (c.state == drift.WaterInTables) {
			t.Errorf("%v °C: a band is there: %v", c.tempC, ok)
		}
		if !ok {
			continue
		}
		near(t, "low", b.Low.Or(0).Minutes(), c.low, 1e-6)
		high := -1.0
		if h, closed := b.High.Get(); closed {
			high = h.Minutes()
		}
		near(t, "high", high, c.high, 1e-6)
		for _, f := range w.Figures {
			if f.Source == "" {
				t.Errorf("%v °C: a figure without a source: %+v", c.tempC, f)
			}
		}
	}
}

// Every row gathered on survival by temperature is met by a figure.
func TestColdWaterAgainstTable(t *testing.T) {
	bands := map[string][2]float64{ // survival, minutes; from the columns value_2
		"<= 0 C (32 F)": {15, 45}, "0-4 C (32.5-40 F)": {30, 90}, "4-10 C (40-50 F)": {60, 180},
		"10-16 C (50-60 F)": {60, 360}, "16-21 C (60-70 F)": {120, 2400},
	}
	// The upper end of each row belongs to it, as "<= 0" says.
	temps := map[string]float64{"<= 0 C (32 F)": 0, "0-4 C (32.5-40 F)": 4, "4-10 C (40-50 F)": 10, "10-16 C (50-60 F)": 16, "16-21 C (60-70 F)": 21}
	met := 0
	for _, row := range table(t, "survival.csv") {
		want, ok := bands[row[1]]
		if row[0] != "unconsciousness / survival" || !ok {
			continue
		}
		w, err := drift.ColdWaterAt(temps[row[1]], drift.FlotationUnknown)
		if err != nil {
			t.Fatal(err)
		}
		for _, f := range w.Figures {
			if f.What == "survival" && strings.HasPrefix(f.Source, "US Search") {
				near(t, row[1]+" low", f.Band.Low.Or(-1).Minutes(), want[0], 0)
				near(t, row[1]+" high", f.Band.High.Or(-1).Minutes(), want[1], 0)
				met++
			}
		}
	}
	if met != len(bands) {
		t.Errorf("%d rows met, want %d", met, len(bands))
	}
}

// The worksheet shows the figures of the datum, and ends no search.
func TestWorksheet(t *testing.T) {
	at := clock("10:00")
	c := drift.Case{
		Start: drift.Start{Position: position(t, "50N 001W")}, FellFrom: at, FellTo: at, Class: class(t, "person"),
		Winds: winds(t, windFrom(at, 240, 15)), Currents: currents(t, currentFrom(at, 100, 1.2)),
	}
	text := datumAt(t, c, clock("12:00")).Worksheet(c).String()
	for _, want := range []string{
		"1. Start", "towards 060.0 0.235 kn x 2.000 h = towards 060.0 0.470 NM", "towards 100.0 2.400 NM",
		"towards 093.8 2.777 NM", "towards 090.2 2.599 NM", "towards 098.4 2.864 NM", "5. Total probable error",
		"person, helm, 10:00", "Nothing here is a reason to stop searching.",
	} {
		if !strings.Contains(text, want) {
			t.Errorf("no %q in\n%s", want, text)
		}
	}
	if strings.Contains(text, "NaN") || strings.Contains(text, "!") {
		t.Errorf("worksheet\n%s", text)
	}
	blind := c
	blind.Winds, blind.Currents = weather.History{}, weather.History{}
	if text := datumAt(t, blind, clock("12:00")).Worksheet(blind).String(); !strings.Contains(text, "wind not known") {
		t.Errorf("worksheet\n%s", text)
	}
}
