package turn

import (
	"errors"
	"math"
	"strings"
	"testing"

	"pgregory.net/rapid"

	"wakeback/drift/nav"
)

// Port side, 5 kn: wheel to port, stern clears; at 18 kn the person is astern.
func TestScenario14SideOfTheFall(t *testing.T) {
	for _, tt := range []struct {
		side Side
		kn   float64
		code Code
		says string
	}{
		{Port, 5, SternClear, "wheel to port, stern clears"},
		{Starboard, 5, SternClear, "wheel to starboard, stern clears"},
		{Port, 18, SlowTurn, "person is astern: slow, then turn"},
		{Port, 0, SternClear, "wheel to port, stern clears"},
		{Unknown, 5, EitherWay, "either way. Heading zero four zero, reciprocal two two zero"},
	} {
		got := FirstOrder(tt.side, tt.kn, 40)
		if got.Code != tt.code || got.Words() != tt.says {
			t.Errorf("%s at %v kn: %s, %q", tt.side, tt.kn, got.Code, got.Words())
		}
	}
}

// No side is ever named while it is unknown.
func TestScenario13FirstOrderNamesNoSide(t *testing.T) {
	rapid.Check(t, func(rt *rapid.T) {
		a := FirstOrder(Unknown, rapid.Float64Range(0, 40).Draw(rt, "kn"), nav.True(rapid.Float64Range(0, 360).Draw(rt, "heading")))
		if w := a.Words(); a.Side != Unknown || strings.Contains(w, "port") || strings.Contains(w, "starboard") {
			rt.Fatalf("%+v %q", a, w)
		}
	})
}

// Closest approach 18 m, then the range opens: one missed pass, and the next
// approach is for the other side.
func TestScenario16MissedPass(t *testing.T) {
	var w PassWatch
	missed := 0
	for s := range 120 {
		if w.Add(math.Hypot(18, 3*float64(60-s)), 20) {
			missed++
		}
	}
	if missed != 1 || w.Missed != 1 {
		t.Fatalf("%d passes missed", missed)
	}
	near(t, "closest", w.ClosestM, 18, 0.1)

	c := ApproachCase{WindFrom: nav.Some[nav.TrueDeg](270), Bearing: 250, RangeM: 150, SpeedKn: 4, RadiusM: 20, LengthM: 10, Choice: ToWindward}
	first, err := PlanApproach(c)
	if err != nil {
		t.Fatal(err)
	}
	c.Missed = w.Missed
	second, err := PlanApproach(c)
	if err != nil {
		t.Fatal(err)
	}
	if first.Candidates[0].PickUp != ToWindward || second.Candidates[0].PickUp != ToLeeward || !strings.Contains(second.Reason, "missed pass 1") {
		t.Errorf("first %s, second %s because %q", first.Candidates[0].PickUp, second.Candidates[0].PickUp, second.Reason)
	}
}

// Noise, a far circle and a run past at a mile are no missed passes.
func TestNoMissedPass(t *testing.T) {
	var noise, far PassWatch
	for s := range 300 {
		noise.Add(100+4*math.Sin(float64(s)), 20)
		far.Add(math.Hypot(1852, 5*float64(150-s)), 20)
	}
	if noise.Missed != 0 || far.Missed != 0 {
		t.Errorf("%d by noise, %d at a mile", noise.Missed, far.Missed)
	}
}

func TestApproachCues(t *testing.T) {
	c := ApproachCase{WindFrom: nav.Some[nav.TrueDeg](0), SpeedKn: 5, RadiusM: 20, LengthM: 10, StoppingM: nav.Some(50.0)}
	for rangeM, want := range map[float64]Code{60: Steady, 50: WayOff, 16: WayOff, 15: Neutral, 0: Neutral} {
		c.RangeM = rangeM
		a, err := PlanApproach(c)
		if err != nil {
			t.Fatal(err)
		}
		if a.Now != want || !a.CardOpen {
			t.Errorf("at %v m: %s, card %v", rangeM, a.Now, a.CardOpen)
		}
	}
	c.RangeM = 186
	if a, _ := PlanApproach(c); a.CardOpen {
		t.Error("the card opens at a tenth of a mile")
	}
}

func TestApproachRefuses(t *testing.T) {
	good := ApproachCase{RangeM: 100, LengthM: 10, SpeedKn: 5, RadiusM: 20}
	if a, err := PlanApproach(good); err != nil || len(a.Candidates) != 1 || !strings.Contains(a.Reason, "wind unknown") {
		t.Errorf("no wind: %+v %v", a, err)
	}
	for _, spoil := range []func(*ApproachCase){
		func(c *ApproachCase) { c.RangeM = math.NaN() }, func(c *ApproachCase) { c.LengthM = 0 },
		func(c *ApproachCase) { c.SpeedKn = -1 }, func(c *ApproachCase) { c.Choice = "abeam" },
	} {
		c := good
		spoil(&c)
		if _, err := PlanApproach(c); !errors.Is(err, ErrApproach) {
			t.Errorf("%+v: %v", c, err)
		}
	}
}

// Both sides are always offered, on a heading near the wind, with reasons that
// name their sources; the person lies to leeward of a vessel that ends to
// windward, and the other way about.
func TestApproachProperties(t *testing.T) {
	rapid.Check(t, func(rt *rapid.T) {
		wind := nav.True(rapid.Float64Range(0, 360).Draw(rt, "wind"))
		c := ApproachCase{
			WindFrom: nav.Some(wind), Bearing: nav.True(rapid.Float64Range(0, 360).Draw(rt, "bearing")), RangeM: 100,
			SpeedKn: 5, RadiusM: 20, LengthM: 10, UnderSail: rapid.Bool().Draw(rt, "sail"),
			Choice: rapid.SampledFrom([]PickUp{"", ToWindward, ToLeeward}).Draw(rt, "choice"), Missed: rapid.IntRange(0, 3).Draw(rt, "missed"),
		}
		a, err := PlanApproach(c)
		if err != nil || len(a.Candidates) != 2 || a.Candidates[0].PickUp == a.Candidates[1].PickUp || a.Reason == "" {
			rt.Fatalf("%+v %v", a, err)
		}
		if c.Choice != "" && c.Missed == 0 && a.Candidates[0].PickUp != c.Choice {
			rt.Fatalf("the skipper chose %s", c.Choice)
		}
		for _, k := range a.Candidates {
			if len(k.For) == 0 || len(k.With) == 0 || math.Abs(k.Course.Minus(wind)) > 61 {
				rt.Fatalf("%+v", k)
			}
			toPerson := nav.Along(k.Course.Add(90*float64(k.Side)), 1)
			downwind := nav.Along(wind.Reciprocal(), 1)
			lee := toPerson.EastM*downwind.EastM + toPerson.NorthM*downwind.NorthM
			if (lee > 0) != (k.PickUp == ToWindward) {
				rt.Fatalf("%s with the person to %s on %s in wind %s", k.PickUp, k.Side, k.Course, wind)
			}
		}
	})
}
