package feed

import (
	"encoding/json"
	"fmt"
	"math"
	"reflect"
	"slices"
	"strings"
	"testing"
	"time"

	"pgregory.net/rapid"

	"wakeback/drift/nav"
	"wakeback/server/feed/nmea"
)

var start = time.Date(2026, 6, 1, 2, 0, 0, 0, time.UTC)

// bridge is a state with a clock, fed with sentences by hand.
type bridge struct {
	t   testing.TB
	st  *state
	now time.Time
}

func newBridge(t testing.TB) *bridge {
	st := newState()
	st.name = func(id sourceID) string { return fmt.Sprintf("feed%d", id) }
	return &bridge{t: t, st: st, now: start}
}

// say lets a feed say a sentence, given without its checksum.
func (b *bridge) say(feed sourceID, body string) nav.Opt[nav.Fix] {
	b.t.Helper()
	s, m, err := nmea.Parse(nmea.Encode(nmea.Parametric, body))
	if err != nil {
		b.t.Fatalf("%s: %v", body, err)
	}
	return b.st.apply(said{src: feed, at: b.now, line: b.now, sentence: s.Talker + s.Formatter}, m)
}

func (b *bridge) wait(d time.Duration) { b.now = b.now.Add(d) }

func (b *bridge) vessel() Vessel { return b.st.snapshot(b.now) }

// fix says an RMC with the time of the clock.
func (b *bridge) fix(feed sourceID, p nav.Position, sogKn, cogDeg float64) nav.Opt[nav.Fix] {
	b.t.Helper()
	return b.fixAt(feed, p, sogKn, cogDeg, b.now)
}

func (b *bridge) fixAt(feed sourceID, p nav.Position, sogKn, cogDeg float64, utc time.Time) nav.Opt[nav.Fix] {
	b.t.Helper()
	line := nmea.EncodeRMC("GP", utc, nmea.RMC{
		Quality: nmea.Autonomous, Position: nav.Some(p), SogKn: nav.Some(sogKn), CogTrue: nav.Some(nav.True(cogDeg)),
	})
	return b.say(feed, strings.TrimSuffix(strings.TrimPrefix(line, "$"), line[len(line)-5:]))
}

var here = nav.PositionFromDegrees(54, 7.9)

func near(t *testing.T, what string, got, want, tolerance float64) {
	t.Helper()
	if math.IsNaN(got) || math.Abs(got-want) > tolerance {
		t.Errorf("%s = %v, want %v within %v", what, got, want, tolerance)
	}
}

// What each sentence says arrives in its place, with its source.
func TestEverySentenceFindsItsPlace(t *testing.T) {
	b := newBridge(t)
	for _, body := range []string{
		"GPRMC,020000.00,A,5400.00000,N,00754.00000,E,6.0,290.0,010626,,,A",
		"HEHDT,285.0,T", "VWVHW,,T,,M,5.5,N,,K", "WIMWV,30.0,R,15.0,N,A", "WIMWV,40.0,T,12.0,N,A",
		"INMTW,11.5,C", "SDDPT,2.3,0.5", "IIVDR,100.0,T,,M,1.2,N",
	} {
		b.say(1, body)
	}
	v := b.vessel()
	near(t, "latitude", Fresh(v.Position).Or(nav.Position{}).LatDeg(), 54, 1e-9)
	near(t, "sog", Fresh(v.SogKn).Or(-1), 6, 0)
	near(t, "cog", float64(Fresh(v.CogTrue).Or(-1)), 290, 0)
	near(t, "heading", float64(Fresh(v.HeadingTrue).Or(-1)), 285, 0)
	near(t, "stw", Fresh(v.StwKn).Or(-1), 5.5, 0)
	near(t, "apparent wind angle", float64(Fresh(v.WindApparent).Or(RelativeWind{}).AngleRelativeDeg), 30, 0)
	near(t, "true wind angle", float64(Fresh(v.WindRelative).Or(RelativeWind{}).AngleRelativeDeg), 40, 0)
	near(t, "water", Fresh(v.WaterC).Or(-99), 11.5, 0)
	near(t, "depth below the surface", Fresh(v.DepthM).Or(-1), 2.8, 1e-12)
	near(t, "set", float64(Fresh(v.Current).Or(Current{}).SetDeg), 100, 0)
	if w := Fresh(v.Time).Or(InstrumentTime{}); !w.UTC.Equal(start) || w.OffsetS != 0 || w.Suspect != "" {
		t.Errorf("time = %+v", w)
	}
	if r, _ := v.Position.Get(); r.Source != "feed1" || r.Sentence != "GPRMC" || !r.At.Equal(start) {
		t.Errorf("position reading = %+v", r)
	}
}

// Names on the wire are snake_case, a number's name ends in its unit, and what
// was never received is null.
func TestVesselOnTheWire(t *testing.T) {
	text, err := json.Marshal(newBridge(t).vessel())
	if err != nil {
		t.Fatal(err)
	}
	var m map[string]any
	if err := json.Unmarshal(text, &m); err != nil {
		t.Fatal(err)
	}
	for _, name := range []string{
		"position", "fix", "sog_kn", "cog_deg", "heading_deg", "heading_mag_deg", "variation_deg", "stw_kn",
		"wind_apparent", "wind_true_relative", "wind", "current", "water_c", "depth_m", "instrument_time",
		"dead_reckoned", "position_spread_m",
	} {
		if v, there := m[name]; !there || v != nil {
			t.Errorf("%s = %v, there %t; want null", name, v, there)
		}
	}
}

// Each reading is fresh up to its limit and stale past it, and a stale one
// gives nothing by Fresh.
func TestStaleness(t *testing.T) {
	tests := []struct {
		body  string
		limit time.Duration
		stale func(Vessel) (there, stale, fresh bool)
	}{
		{"GPGLL,5400.0,N,00754.0,E,020000,A,A", limitPosition, staleness(func(v Vessel) nav.Opt[Reading[nav.Position]] { return v.Position })},
		{"GPVTG,290.0,T,,M,6.0,N,,K,A", limitMotion, staleness(func(v Vessel) nav.Opt[Reading[float64]] { return v.SogKn })},
		{"HEHDT,285.0,T", limitHeading, staleness(func(v Vessel) nav.Opt[Reading[nav.TrueDeg]] { return v.HeadingTrue })},
		{"HCHDM,285.0,M", limitHeading, staleness(func(v Vessel) nav.Opt[Reading[nav.MagneticDeg]] { return v.HeadingMag })},
		{"VWVHW,,T,,M,5.5,N,,K", limitStw, staleness(func(v Vessel) nav.Opt[Reading[float64]] { return v.StwKn })},
		{"VMVBW,5.0,0.1,A,,,V", limitStw, staleness(func(v Vessel) nav.Opt[Reading[float64]] { return v.StwKn })},
		{"WIMWV,30.0,R,15.0,N,A", limitWind, staleness(func(v Vessel) nav.Opt[Reading[RelativeWind]] { return v.WindApparent })},
		{"WIMWD,302.4,T,,M,10.5,N,,M", limitWind, staleness(func(v Vessel) nav.Opt[Reading[Wind]] { return v.Wind })},
		{"IIVDR,100.0,T,,M,1.2,N", limitCurrent, staleness(func(v Vessel) nav.Opt[Reading[Current]] { return v.Current })},
		{"INMTW,11.5,C", limitWater, staleness(func(v Vessel) nav.Opt[Reading[float64]] { return v.WaterC })},
		{"SDDPT,2.3,0.0", limitDepth, staleness(func(v Vessel) nav.Opt[Reading[float64]] { return v.DepthM })},
		{"GPZDA,020000,01,06,2026,00,00", limitTime, staleness(func(v Vessel) nav.Opt[Reading[InstrumentTime]] { return v.Time })},
	}
	for _, tt := range tests {
		b := newBridge(t)
		b.say(0, tt.body)
		for _, step := range []struct {
			at    time.Duration
			stale bool
		}{{0, false}, {tt.limit, false}, {tt.limit + time.Millisecond, true}} {
			b.now = start.Add(step.at)
			there, stale, fresh := tt.stale(b.vessel())
			if !there || stale != step.stale || fresh == step.stale {
				t.Errorf("%s after %s: there %t, stale %t, fresh %t", tt.body, step.at, there, stale, fresh)
			}
		}
	}
}

func staleness[T any](read func(Vessel) nav.Opt[Reading[T]]) func(Vessel) (bool, bool, bool) {
	return func(v Vessel) (bool, bool, bool) {
		r, ok := read(v).Get()
		return ok, r.Stale, Fresh(read(v)).IsSet()
	}
}

// No status of "not valid" ever becomes a position, and 0,0 neither.
func TestNoFixIsNoPosition(t *testing.T) {
	for _, body := range []string{
		"GPRMC,020000,V,5400.0,N,00754.0,E,6.0,290.0,010626,,,N",
		"GPRMC,020000,A,5400.0,N,00754.0,E,6.0,290.0,010626,,,N",
		"GPRMC,020000,A,,,,,,,010626,,,A",
		"GPGGA,020000,5400.0,N,00754.0,E,0,00,,,M,,M,,",
		"GPGLL,5400.0,N,00754.0,E,020000,V,N",
		"GNGNS,020000,5400.0,N,00754.0,E,NN,00,,,,,",
		"GPRMC,020000,A,0000.0,N,00000.0,E,0.0,,010626,,,A",
		"GPRMC,020000,A,5400.0,N,00754.0,E,6.0,290.0,010626,,,S", // a simulator's
		"GPGGA,020000,5400.0,N,00754.0,E,7,08,1.0,0,M,0,M,,",     // typed in
	} {
		b := newBridge(t)
		if f := b.say(0, body); f.IsSet() {
			t.Errorf("%s gave a fix", body)
		}
		if v := b.vessel(); v.Position.IsSet() || v.Where().IsSet() || v.SogKn.IsSet() {
			t.Errorf("%s: position %+v, sog %+v", body, v.Position, v.SogKn)
		}
	}
}

// The preferred feed is used; when it goes stale the next takes over at once;
// when it is back it must hold steady before it is used again.
func TestPreferenceAndReturn(t *testing.T) {
	b := newBridge(t)
	east := here.Shift(nav.Offset{EastM: 10}) // where the second receiver stands
	used := func() string { r, _ := b.vessel().Position.Get(); return r.Source }
	both := func() { b.fix(0, here, 0, 0); b.fix(1, east, 0, 0) }

	both()
	if used() != "feed0" {
		t.Fatalf("at first %s", used())
	}
	for range 6 { // 0 is silent
		b.wait(time.Second)
		b.fix(1, east, 0, 0)
	}
	if used() != "feed1" {
		t.Fatalf("feed0 is stale, used %s", used())
	}
	for s := range 9 {
		b.wait(time.Second)
		both()
		if used() != "feed1" {
			t.Fatalf("feed0 took over again after %d s", s)
		}
	}
	for range 2 {
		b.wait(time.Second)
		both()
	}
	if used() != "feed0" {
		t.Errorf("feed0 has been steady for %s, used %s", steadyFor, used())
	}
	near(t, "spread", b.vessel().SpreadM.Or(-1), 10, 0.05)
}

// A receiver's own dead reckoning gives way to satellites of a feed named later.
func TestQualityBeforeOrder(t *testing.T) {
	b := newBridge(t)
	for range 12 {
		b.wait(time.Second)
		hms := b.now.Format("150405")
		b.say(0, "GPGGA,"+hms+",5400.0,N,00754.0,E,6,00,,,M,,M,,")
		b.say(1, "GPGGA,"+hms+",5400.0,N,00754.0,E,1,08,1.0,0,M,0,M,,")
	}
	v := b.vessel()
	if r, _ := v.Position.Get(); r.Source != "feed1" {
		t.Errorf("used %s", r.Source)
	}
	if d := v.Fix.Or(FixDetail{}); d.Quality != nmea.Autonomous || d.Satellites.Or(0) != 8 || d.HDOP.Or(0) != 1 {
		t.Errorf("detail = %+v", d)
	}
}

// Positions that cannot be are held back and shown; a run that persists is
// taken.
func TestHeldBack(t *testing.T) {
	far := here.Shift(nav.Offset{EastM: 5000})
	tests := []struct {
		name   string
		reason string
		wild   func(*bridge)
	}{
		{"jump", "jump of", func(b *bridge) { b.fix(0, far, 0, 0) }},
		{"0,0", "exactly 0,0", func(b *bridge) { b.fix(0, nav.Position{}, 0, 0) }},
		{"time runs back", "ran back by 59m59s", func(b *bridge) { b.fixAt(0, here, 0, 0, b.now.Add(-time.Hour)) }},
		{"clock leaps with a jump", "jump of", func(b *bridge) { b.fixAt(0, far, 0, 0, b.now.Add(time.Hour)) }},
	}
	for _, tt := range tests {
		b := newBridge(t)
		b.fix(0, here, 0, 0)
		b.wait(time.Second)
		tt.wild(b)
		v := b.vessel()
		if len(v.Held) != 1 || !strings.Contains(v.Held[0].Reason, tt.reason) || v.Held[0].Count != 1 || !v.Held[0].Holding {
			t.Errorf("%s: held %+v", tt.name, v.Held)
		}
		if r, _ := v.Position.Get(); nav.Inverse(r.Value, here).RangeM > 0.1 {
			t.Errorf("%s: position %+v is used", tt.name, r)
		}
		b.wait(time.Second)
		if !b.fix(0, here, 0, 0).IsSet() || b.vessel().Held[0].Holding {
			t.Errorf("%s: a good fix afterwards is not used", tt.name)
		}
	}
}

func TestPersistingJumpIsAdopted(t *testing.T) {
	b := newBridge(t)
	far := here.Shift(nav.Offset{EastM: 50000})
	b.fix(0, here, 0, 0)
	adopted := time.Duration(0)
	for s := 1; s <= 15 && adopted == 0; s++ {
		b.wait(time.Second)
		if b.fix(0, far, 0, 0).IsSet() {
			adopted = b.now.Sub(start)
		}
	}
	// The run begins one second after the good fix and must span ten.
	if adopted != 11*time.Second {
		t.Errorf("adopted after %s", adopted)
	}
	if h := b.vessel().Held; len(h) != 1 || h[0].Adopted != 1 || h[0].Count != 10 {
		t.Errorf("held = %+v", h)
	}
}

// 0,0 is never adopted, however long a receiver sends it; a vessel that sails
// there is believed.
func TestZeroZero(t *testing.T) {
	b := newBridge(t)
	for range 60 {
		b.wait(time.Second)
		if b.fix(0, nav.Position{}, 0, 0).IsSet() {
			t.Fatal("0,0 was adopted")
		}
	}
	b.fix(0, nav.PositionFromDegrees(0.0001, 0), 6, 180)
	b.wait(time.Second)
	if !b.fix(0, nav.Position{}, 6, 180).IsSet() {
		t.Error("a vessel 11 m from 0,0 may not go there")
	}
}

// A vessel that never goes faster than the limit is never held back, whatever
// the gaps between her fixes. (Away from 0,0, which has its own rule.)
func TestNothingPossibleIsHeld(t *testing.T) {
	rapid.Check(t, func(rt *rapid.T) {
		b := newBridge(t)
		p := nav.PositionFromDegrees(rapid.Float64Range(1, 80).Draw(rt, "lat"), rapid.Float64Range(-180, 179.9).Draw(rt, "lon"))
		b.fix(0, p, 0, 0)
		for range rapid.IntRange(1, 20).Draw(rt, "fixes") {
			gap := time.Duration(rapid.IntRange(1, 3600).Draw(rt, "gap_s")) * time.Second
			kn, dir := rapid.Float64Range(0, defaultMaxKn).Draw(rt, "kn"), rapid.Float64Range(0, 360).Draw(rt, "dir")
			p, _ = nav.Direct(p, nav.True(dir), kn*nav.MsPerKn*gap.Seconds())
			b.wait(gap)
			b.fix(0, p, kn, dir)
		}
		if h := b.vessel().Held; len(h) != 0 {
			rt.Fatalf("held %+v", h)
		}
	})
}

// Positions are carried on by heading and log, turns included; then by course
// and speed over ground; then by the last known motion. The error only grows.
func TestDeadReckoning(t *testing.T) {
	b := newBridge(t)
	b.fix(0, here, 6, 0)
	b.say(0, "VWVHW,,T,,M,6.0,N,,K")
	leg := func(deg, seconds int) (last DeadReckoned) {
		for range seconds {
			b.say(0, fmt.Sprintf("HEHDT,%d.0,T", deg))
			b.say(0, "VWVHW,,T,,M,6.0,N,,K")
			b.wait(time.Second)
			d, ok := b.vessel().DeadReckoned.Get()
			if ok && d.ErrorM < last.ErrorM {
				t.Fatalf("the error fell from %g to %g", last.ErrorM, d.ErrorM)
			}
			last = d
		}
		return last
	}
	leg(0, 60)
	d := leg(90, 60)
	run := 60 * 6 * nav.MsPerKn // 185.2 m on each leg
	o := nav.NewPlane(here).Offset(d.Position)
	// The first second of the second leg was still heading north; 3.1 m.
	near(t, "north", o.NorthM, run, 6.5)
	near(t, "east", o.EastM, run, 6.5)
	near(t, "run", d.RunM, 2*run, 1e-6)
	near(t, "age", d.FixAgeS, 120, 1e-9)
	if d.Basis != ByWater {
		t.Errorf("basis = %s", d.Basis)
	}
	// 2 x sqrt((D sin 5)^2 + (D 10%)^2 + (1 kn x 120 s)^2 + 4^2), by hand.
	D := 2 * run
	near(t, "error", d.ErrorM, 2*math.Sqrt(math.Pow(D*math.Sin(5*math.Pi/180), 2)+math.Pow(D*0.1, 2)+math.Pow(nav.MsPerKn*120, 2)+16), 1e-6)

	w := b.vessel().Where().Or(Where{})
	if !w.DeadReckoned || w.ErrorM.Or(0) != d.ErrorM {
		t.Errorf("where = %+v", w)
	}
	b.wait(10 * time.Minute) // everything is silent
	lost := b.vessel().DeadReckoned.Or(DeadReckoned{})
	if lost.Basis != ByLast || lost.ErrorM < 2*(lost.RunM-D) {
		t.Errorf("all silent: %+v", lost)
	}
	if f := b.vessel().FixNow(); f.IsSet() {
		t.Errorf("a stale fix is offered: %+v", f)
	}
	b.fix(0, here, 6, 0)
	if v := b.vessel(); v.DeadReckoned.IsSet() || v.Where().Or(Where{}).DeadReckoned {
		t.Error("still dead reckoning after a fix")
	}
}

// Course and speed over the ground carry on where there is no log, and the
// answer does not depend on how often it is asked for.
func TestDeadReckoningByGround(t *testing.T) {
	ask := func(every time.Duration) DeadReckoned {
		b := newBridge(t)
		b.fix(0, here, 12, 45)
		for b.now.Before(start.Add(60 * time.Second)) {
			if b.now.Sub(start)%(2*time.Second) == 0 {
				b.say(0, "GPVTG,45.0,T,,M,12.0,N,,K,A")
			}
			b.wait(every)
			b.vessel()
		}
		return b.vessel().DeadReckoned.Or(DeadReckoned{})
	}
	rare, often := ask(2*time.Second), ask(100*time.Millisecond)
	if rare.Basis != ByGround {
		t.Errorf("basis = %s", rare.Basis)
	}
	near(t, "run", rare.RunM, 12*nav.MsPerKn*60, 1e-6)
	near(t, "distance between the two", nav.Inverse(rare.Position, often.Position).RangeM, 0, 1e-3)
}

// The published example of the error of a dead reckoning: 2 miles, 3 degrees,
// 5 per cent give 0.145 mile.
func TestRunErrorPublished(t *testing.T) {
	near(t, "sigma", runSigmaM(2*nav.MetresPerNM, 3, 0.05)/nav.MetresPerNM, 0.145, 0.0005)
}

// Wind by hand: 16 kn over the bow at 6 kn through the water is 10 kn from
// ahead; a calm felt aboard is a following wind of the vessel's speed.
func TestWindByHand(t *testing.T) {
	tests := []struct {
		name     string
		say      []string
		from, kn float64
		ref      WindReference
	}{
		{"head wind", []string{"HEHDT,0.0,T", "VWVHW,,T,,M,6.0,N,,K", "WIMWV,0.0,R,16.0,N,A"}, 0, 10, OverWater},
		{"following", []string{"HEHDT,90.0,T", "VWVHW,,T,,M,6.0,N,,K", "WIMWV,0.0,R,0.0,N,A"}, 270, 6, OverWater},
		// 8 kn from abeam to starboard by 3-4-5: the vessel's 6 kn makes 10 felt.
		{"abeam", []string{"HEHDT,0.0,T", "VWVHW,,T,,M,6.0,N,,K", "WIMWV,53.130102,R,10.0,N,A"}, 90, 8, OverWater},
		{"over ground", []string{"HEHDT,0.0,T", "GPVTG,0.0,T,,M,6.0,N,,K,A", "WIMWV,0.0,R,16.0,N,A"}, 0, 10, OverGround},
		{"as sent", []string{"HEHDT,0.0,T", "VWVHW,,T,,M,6.0,N,,K", "WIMWV,0.0,R,16.0,N,A", "WIMWD,302.4,T,,M,10.5,N,,M"}, 302.4, 10.5, AsInstrument},
		{"true from the bow", []string{"HEHDT,350.0,T", "WIMWV,20.0,T,12.0,N,A"}, 10, 12, AsInstrument},
	}
	for _, tt := range tests {
		b := newBridge(t)
		for _, s := range tt.say {
			b.say(0, s)
		}
		w := Fresh(b.vessel().Wind).Or(Wind{SpeedKn: -1})
		near(t, tt.name+": speed", w.SpeedKn, tt.kn, 1e-6)
		near(t, tt.name+": from", w.FromDeg.Minus(nav.True(tt.from)), 0, 1e-5)
		if w.Reference != tt.ref {
			t.Errorf("%s: reference %s", tt.name, w.Reference)
		}
	}
}

// A derived wind is stale as soon as one of its parts is.
func TestDerivedIsAsOldAsItsOldestPart(t *testing.T) {
	b := newBridge(t)
	b.say(0, "HEHDT,0.0,T")
	b.say(0, "VWVHW,,T,,M,6.0,N,,K")
	b.wait(4 * time.Second) // past the limit of the heading
	b.say(0, "WIMWV,0.0,R,16.0,N,A")
	r, ok := b.vessel().Wind.Get()
	if !ok || !r.Stale || r.AgeS != 4 {
		t.Errorf("wind = %+v, %t", r, ok)
	}
}

// The published compass: 98.3 with deviation 0.1 E and variation 12.6 W is 85.8
// true. A model, where there is one and a position, goes before the compass's
// own variation.
func TestHeadings(t *testing.T) {
	b := newBridge(t)
	b.say(0, "HCHDG,98.3,0.1,E,12.6,W")
	v := b.vessel()
	near(t, "magnetic", float64(Fresh(v.HeadingMag).Or(-1)), 98.4, 1e-9)
	near(t, "true", float64(Fresh(v.HeadingTrue).Or(-1)), 85.8, 1e-9)
	if r, _ := v.HeadingTrue.Get(); r.Derived == "" {
		t.Error("a derived heading does not say so")
	}
	b.st.variation = func(nav.Position, time.Time) nav.Opt[nav.VariationDeg] { return nav.Some(nav.VariationDeg(3)) }
	b.fix(0, here, 0, 0)
	near(t, "true by the model", float64(Fresh(b.vessel().HeadingTrue).Or(-1)), 101.4, 1e-9)
	b.say(0, "HEHDT,100.0,T")
	v = b.vessel()
	near(t, "true as sent", float64(Fresh(v.HeadingTrue).Or(-1)), 100, 0)
	b.wait(4 * time.Second)
	b.say(0, "HCHDG,98.3,0.1,E,12.6,W")
	near(t, "true, once the gyro is silent", float64(Fresh(b.vessel().HeadingTrue).Or(-1)), 101.4, 1e-9)
}

// A date without a day is nearest to the last full one; a receiver 1024 weeks
// behind is said to be suspect, and spoils no age.
func TestInstrumentTime(t *testing.T) {
	b := newBridge(t)
	b.now = time.Date(2026, 6, 1, 23, 59, 59, 0, time.UTC)
	b.fix(0, here, 0, 0)
	b.wait(2 * time.Second)
	b.say(0, "GPGLL,5400.0,N,00754.0,E,000001,A,A")
	v := b.vessel()
	if at, _ := v.Fix.Or(FixDetail{}).UTC.Get(); !at.Equal(b.now) || len(v.Held) != 0 {
		t.Errorf("across midnight: %s, held %+v", at, v.Held)
	}
	old := newBridge(t)
	old.fixAt(0, here, 0, 0, start.AddDate(0, 0, -1024*7))
	if w := Fresh(old.vessel().Time).Or(InstrumentTime{}); w.Suspect == "" || w.OffsetS != -1024*7*86400 {
		t.Errorf("time = %+v", w)
	}
	if r, _ := old.vessel().Position.Get(); r.AgeS != 0 || r.Stale {
		t.Errorf("position = %+v", r)
	}
}

// The machine's clock set back an hour makes nothing fresh that is not, and
// what comes afterwards is used.
func TestClockSetBack(t *testing.T) {
	b := newBridge(t)
	b.say(0, "HEHDT,10.0,T")
	b.wait(-time.Hour)
	if h := Fresh(b.vessel().HeadingTrue); h.IsSet() {
		t.Errorf("a heading from the future is fresh: %v", h)
	}
	b.say(0, "HEHDT,20.0,T")
	near(t, "heading", float64(Fresh(b.vessel().HeadingTrue).Or(-1)), 20, 0)
}

// Room: what is kept depends on the number of feeds, not on what they say.
func TestSlotsAreBounded(t *testing.T) {
	b := newBridge(t)
	for i := range 2000 {
		b.wait(time.Second)
		b.fix(sourceID(i%2), here, 0, 0)
		b.say(sourceID(i%2), "HEHDT,10.0,T")
	}
	if n := len(b.st.position.slots); n != 2 {
		t.Errorf("%d slots", n)
	}
	if n := len(b.st.sources); n != 2 {
		t.Errorf("%d sources", n)
	}
}

// Every quantity of the state is in the snapshot: a new one cannot be forgotten.
func TestNoQuantityIsForgotten(t *testing.T) {
	var names []string
	st := reflect.TypeFor[state]()
	for i := range st.NumField() {
		if f := st.Field(i); strings.HasPrefix(f.Type.Name(), "quantity[") {
			names = append(names, f.Name)
		}
	}
	slices.Sort(names)
	want := []string{"cog", "current", "depth", "headingMag", "headingTrue", "position", "sentVar", "sog", "stw", "time", "water", "windApparent", "windNorth", "windRelative"}
	if !slices.Equal(names, want) {
		t.Errorf("quantities = %v: give a new one a limit and a row in TestStaleness", names)
	}
}

func BenchmarkApply(b *testing.B) {
	br := newBridge(b)
	var bodies []nmea.Body
	for _, s := range []string{
		"GPRMC,020000.00,A,5400.00000,N,00754.00000,E,6.0,290.0,010626,,,A", "HCHDG,98.3,0.1,E,12.6,W",
		"VWVHW,,T,,M,5.5,N,,K", "WIMWV,30.0,R,15.0,N,A",
	} {
		_, body, err := nmea.Parse(nmea.Encode(nmea.Parametric, s))
		if err != nil {
			b.Fatal(err)
		}
		bodies = append(bodies, body)
	}
	i := 0
	for b.Loop() {
		br.now = br.now.Add(time.Millisecond)
		br.st.apply(said{at: br.now, line: br.now, sentence: "XXXXX"}, bodies[i%len(bodies)])
		i++
	}
}
