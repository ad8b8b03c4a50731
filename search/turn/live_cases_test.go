package turn

import (
	"errors"
	"math"
	"slices"
	"strings"
	"testing"
	"time"

	"pgregory.net/rapid"

	"wakeback/drift/nav"
)

// A vessel that really turns a fifth wider or tighter, and slower to answer,
// than the model says comes back all the same: the advice is made from the
// track, not from the model alone.
func TestFollowingWithAWrongModel(t *testing.T) {
	for _, wrong := range []float64{0.8, 1.25} {
		for _, n := range []Name{Single, Williamson, RaceTrack} {
			m := vessels(t)["workboat15m"]
			really := m
			really.RadiusM *= wrong
			really.LagS *= 1.5
			good := 0
			for seed := range uint64(40) {
				c := Case{Model: m, Side: Port, Heading: nav.True(float64(seed) * 53), PersonDrift: nav.Towards(nav.True(float64(seed)*71), 0.6)}
				l, err := NewLive(n, c, Begun{At: begun})
				if err != nil {
					t.Fatal(err)
				}
				v := newSloppy(m, c, seed)
				v.m = really
				if v.follow(l, nil).closestM <= really.RadiusM {
					good++
				}
			}
			if good < 38 {
				t.Errorf("%s, really %v of the radius: %d of 40", n, wrong, good)
			}
		}
	}
}

func live(t testing.TB, n Name, c Case) *Live {
	t.Helper()
	l, err := NewLive(n, c, Begun{At: begun})
	if err != nil {
		t.Fatal(err)
	}
	return l
}

// A fix that jumps 200 m for two seconds changes nothing but a doubt; one that
// stays is believed.
func TestJumpOf200m(t *testing.T) {
	m := yacht(t)
	c := Case{Model: m, Side: Starboard, Heading: 40}
	shift := func(o *Sensed) {
		fix, _ := o.Fix.Get()
		fix.Position = fix.Position.Shift(nav.Offset{EastM: 200})
		o.Fix = nav.Some(fix)
	}
	out := newSloppy(m, c, 3).follow(live(t, Williamson, c), func(o *Sensed, s float64) {
		if at := math.Round(s); at == 30 || at == 31 || at == 70 || at == 71 {
			shift(o)
		}
	})
	if out.closestM > m.RadiusM {
		t.Errorf("passes %v m off", out.closestM)
	}
	seen := 0
	for _, a := range out.advice {
		if slices.Contains(a.Doubts, PositionJumped) {
			seen++
		}
	}
	if seen < 2 || seen > 6 {
		t.Errorf("%d observations held back, expected the four that jumped", seen)
	}

	l := live(t, Williamson, c)
	v := newSloppy(m, c, 3)
	for i := range 10 {
		v.second()
		o := v.sensed()
		if i >= 5 {
			shift(&o)
		}
		l.Update(o)
	}
	if a := l.Now(); slices.Contains(a.Doubts, PositionJumped) || a.RangeM.Or(0) < 150 {
		t.Errorf("a position that stays is not believed: %+v", a)
	}
}

// Without any heading the orders of the turn go by the model and the clock,
// and at the end only the bearing is given.
func TestHeadingUnknown(t *testing.T) {
	m := yacht(t)
	c := Case{Model: m, Side: Starboard, Heading: 40}
	l := live(t, Williamson, c)
	var codes []Code
	for s := range 120 {
		a := l.Update(Sensed{At: begun.Add(time.Duration(s+1) * time.Second)})
		if !slices.Contains(a.Doubts, HeadingByModel) {
			t.Fatalf("no doubt after %d s: %+v", s, a)
		}
		if len(codes) == 0 || codes[len(codes)-1] != a.Code {
			codes = append(codes, a.Code)
		}
	}
	// Midships is left out when by reckoning the person is ahead before.
	codes = slices.DeleteFunc(codes, func(c Code) bool { return c == Midships })
	if want := []Code{HelmOver, HelmShift, ByBearing}; !slices.Equal(codes[:min(3, len(codes))], want) {
		t.Errorf("codes = %v", codes)
	}
}

// The course over the ground stands in for a heading.
func TestHeadingByCourse(t *testing.T) {
	m := yacht(t)
	c := Case{Model: m, Side: Starboard, Heading: 40}
	out := newSloppy(m, c, 5).follow(live(t, RaceTrack, c), func(o *Sensed, _ float64) { o.Heading = nav.None[nav.TrueDeg]() })
	if !slices.ContainsFunc(out.advice, func(a Advice) bool { return slices.Contains(a.Doubts, HeadingByCourse) }) {
		t.Error("the doubt is not told")
	}
	// Two knots of current against six set the course up to 20 degrees off the
	// heading; three radii are what that leaves of the approach.
	if out.closestM > wideRadii*m.RadiusM {
		t.Errorf("passes %v m off", out.closestM)
	}
}

func TestNoWayOn(t *testing.T) {
	c := Case{Model: yacht(t), Side: Port, Heading: 0}
	l := live(t, Single, c)
	at := func(s int, kn float64) Advice {
		return l.Update(Sensed{At: begun.Add(time.Duration(s) * time.Second), Heading: nav.Some[nav.TrueDeg](0), StwKn: nav.Some(kn)})
	}
	if a := at(1, 0); a.Code != NoWay || a.Words() == "" {
		t.Errorf("at rest: %+v", a)
	}
	if a := at(2, 0.8); a.Code != NoWay {
		t.Errorf("way is back only from a knot on: %+v", a)
	}
	if a := at(3, 3); a.Code != HelmOver || a.Helm.Or(0) != -1 {
		t.Errorf("under way again: %+v", a)
	}
}

// She turns the wrong way: the order stands and says so; from 60 degrees on
// the other side is taken over, once.
func TestWrongWay(t *testing.T) {
	c := Case{Model: yacht(t), Side: Starboard, Heading: 90}
	l := live(t, Williamson, c)
	var last Advice
	for s := 1; s <= 10; s++ {
		last = l.Update(Sensed{At: begun.Add(time.Duration(s) * time.Second), Heading: nav.Some(nav.True(90 - 10*float64(s))), StwKn: nav.Some(6.0)})
		switch {
		case s == 3 && (last.Helm.Or(0) != 1 || !slices.Contains(last.Doubts, WrongWay)):
			t.Errorf("30 degrees the wrong way: %+v", last)
		case s >= 7 && !slices.Contains(last.Doubts, SideTakenOver):
			t.Errorf("70 degrees the wrong way: %+v", last)
		}
	}
	if last.Code != HelmShift || last.Helm.Or(0) != 1 {
		t.Errorf("after the other side is adopted: %+v", last)
	}
}

func TestNotTurning(t *testing.T) {
	c := Case{Model: yacht(t), Side: Starboard, Heading: 90}
	l := live(t, Single, c)
	for s := 1; s <= 20; s++ {
		l.Update(Sensed{At: begun.Add(time.Duration(s) * time.Second), Heading: nav.Some[nav.TrueDeg](90), StwKn: nav.Some(6.0)})
	}
	if a := l.Now(); a.Code != HelmOver || !slices.Contains(a.Doubts, NotTurning) {
		t.Errorf("after 20 s straight on: %+v", a)
	}
}

func TestLiveRefusesWhatPlanRefuses(t *testing.T) {
	c := Case{Model: yacht(t)}
	if _, err := NewLive(Williamson, c, Begun{At: begun}); !errors.Is(err, ErrManoeuvre) || !strings.Contains(err.Error(), "unknown") {
		t.Errorf("no side: %v", err)
	}
	c.Side = Port
	if _, err := NewLive(Scharnow, c, Begun{At: begun}); !errors.Is(err, ErrManoeuvre) {
		t.Errorf("Scharnow at once: %v", err)
	}
	if _, err := NewLive("zig", c, Begun{At: begun}); !errors.Is(err, ErrManoeuvre) {
		t.Errorf("unknown: %v", err)
	}
}

// A current faster than the boat carries both: the person is reached all the
// same, while over the ground the boat goes backwards.
func TestCurrentFasterThanTheBoat(t *testing.T) {
	m := yacht(t)
	c := Case{Model: m, Side: Port, Heading: 40}
	v := newSloppy(m, c, 2)
	v.current = nav.Towards(40, 10)
	if out := v.follow(live(t, Williamson, c), nil); out.closestM > m.RadiusM {
		t.Errorf("passes %v m off", out.closestM)
	}
}

// The engine's cues come in their order as the person is neared, and one who
// lies stopped near them is not told to turn.
func TestLiveCues(t *testing.T) {
	m := yacht(t)
	c := Case{Model: m, Side: Port, Heading: 40}
	l, err := NewLive(RaceTrack, c, Begun{At: begun, LengthM: nav.Some(12.0), StoppingM: nav.Some(50.0)})
	if err != nil {
		t.Fatal(err)
	}
	out := newSloppy(m, c, 4).follow(l, nil)
	order := map[Code]int{"": 0, WayOff: 1, Neutral: 2}
	last := 0
	for _, a := range out.advice {
		if order[a.Cue] < last {
			t.Fatalf("cue %q at %v m after a later one", a.Cue, a.RangeM.Or(-1))
		}
		last = order[a.Cue]
	}
	if last != 2 {
		t.Errorf("the engine is never out of gear: closest %v", out.closestM)
	}
	near := m.start(220)
	near.NorthM = 20
	l.est, l.stage = near, len(l.phases)
	a := l.Update(Sensed{At: l.at.Add(time.Second), Heading: nav.Some[nav.TrueDeg](220), StwKn: nav.Some(0.1)})
	if a.Code != StoppedNear || a.Words() == "" {
		t.Errorf("stopped at 20 m: %+v", a)
	}
}

// Back along the track: she comes onto the old track and stays on it.
func TestBackAlongTheTrack(t *testing.T) {
	m := yacht(t)
	c := Case{Model: m, Side: Starboard, Heading: 0}
	l, err := NewLive(Williamson, c, Begun{At: begun, Back: true})
	if err != nil {
		t.Fatal(err)
	}
	v := newSloppy(m, c, 9)
	v.follow(l, func(o *Sensed, s float64) {
		if s > 600 {
			v.t = maxTurnS
		}
	})
	near(t, "off the old track", v.s.EastM, 0, m.RadiusM)
	near(t, "heading", l.Now().Steer.Or(0).Minus(180), 0, 15)
}

// The advice stands whatever comes: no panic, no heading out of range, no
// going back; an observation that is not newer changes nothing.
func TestLiveTakesAnything(t *testing.T) {
	rapid.Check(t, func(rt *rapid.T) {
		c := Case{Model: randomModel(rt), Side: randomSide(rt), Heading: nav.True(rapid.Float64Range(0, 360).Draw(rt, "heading"))}
		n := rapid.SampledFrom([]Name{Single, Williamson, RaceTrack, SlowCircle}).Draw(rt, "name")
		l := live(t, n, c)
		at, stage := begun, 0
		for range 8 {
			at = at.Add(time.Duration(rapid.IntRange(-5, 90).Draw(rt, "dt")) * time.Second)
			a := l.Update(anything(rt, at))
			if a.Stage < stage {
				rt.Fatalf("stage %d after %d", a.Stage, stage)
			}
			stage = a.Stage
			s := float64(a.Steer.Or(0))
			if !(s >= 0 && s < 360) || math.IsNaN(a.RangeM.Or(0)) || a.Code == "" {
				rt.Fatalf("advice %+v", a)
			}
		}
	})
}

func anything(rt *rapid.T, at time.Time) Sensed {
	o := Sensed{At: at}
	odd := func(what string) bool { return rapid.Bool().Draw(rt, what) }
	if odd("heading") {
		o.Heading = nav.Some(nav.TrueDeg(rapid.SampledFrom([]float64{0, 90, 359.9, 400, -10, math.NaN(), math.Inf(1)}).Draw(rt, "heading is")))
	}
	if odd("stw") {
		o.StwKn = nav.Some(rapid.SampledFrom([]float64{0, 3, 30, -1, math.NaN(), 1e9}).Draw(rt, "stw is"))
	}
	if odd("datum") {
		o.Datum = nav.Some(nav.PositionFromDegrees(rapid.SampledFrom([]float64{54, -90, math.NaN()}).Draw(rt, "lat"), 7.9))
	}
	if odd("fix") {
		fix := nav.Fix{At: at, Position: nav.PositionFromDegrees(54, rapid.SampledFrom([]float64{7.9, 7.91, 100, math.Inf(-1)}).Draw(rt, "lon"))}
		fix.SogKn = nav.Some(rapid.SampledFrom([]float64{0, 5, math.NaN()}).Draw(rt, "sog"))
		fix.CogTrue = nav.Some(nav.TrueDeg(rapid.SampledFrom([]float64{10, math.NaN()}).Draw(rt, "cog")))
		o.Fix = nav.Some(fix)
	}
	return o
}

func BenchmarkLiveUpdate(b *testing.B) {
	for _, name := range []string{"yacht12m", "coaster80m"} {
		b.Run(name, func(b *testing.B) {
			m := vessels(b)[name]
			c := Case{Model: m, Side: Port, Heading: 90}
			v := newSloppy(m, c, 1)
			v.second()
			o := v.sensed()
			begin := live(b, RaceTrack, c)
			for b.Loop() {
				l := *begin
				l.Update(o)
			}
		})
	}
}
