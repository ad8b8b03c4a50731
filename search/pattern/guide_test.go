package pattern

import (
	"math"
	"math/rand/v2"
	"testing"
	"time"

	"wakeback/drift/nav"
)

// helm steers a vessel through a plan by the guidance, once a second.
type helm struct {
	plan     Plan
	weaveDeg float64 // standard deviation of the heading steered
	glitches map[int]nav.Offset
	rng      *rand.Rand
}

// sail runs the plan and returns the largest distance off each leg while
// settled on it, and whether all legs were run within the time.
func (h helm) sail(t *testing.T, limit time.Duration) (worstM []float64, done bool) {
	t.Helper()
	plane := nav.NewPlane(h.plan.Datum)
	at := plane.Offset(h.plan.Datum)
	leg, since := 0, nav.None[time.Time]()
	worstM = make([]float64, len(h.plan.Legs))
	weave := 0.0
	for s := 0; s < int(limit.Seconds()); s++ {
		now := h.plan.Begin.Add(time.Duration(s) * time.Second)
		seen := at
		if g, ok := h.glitches[s]; ok {
			seen = seen.Add(g)
		}
		g, err := h.plan.Guide(leg, plane.Position(seen), now, 20)
		if err != nil {
			t.Fatalf("second %d: %v", s, err)
		}
		truth, _ := h.plan.Guide(leg, plane.Position(at), now, 20)
		if truth.AlongM > 0.5*h.plan.Legs[leg].LengthM {
			worstM[leg] = math.Max(worstM[leg], math.Abs(truth.CrossM))
		}
		before := leg
		leg, since = h.plan.Advance(leg, g, now, since)
		if leg < before || leg > before+1 {
			t.Fatalf("second %d: leg %d after %d", s, leg, before)
		}
		if leg == len(h.plan.Legs) {
			return worstM, true
		}
		weave += -weave/10 + h.rng.NormFloat64()*h.weaveDeg*math.Sqrt(2.0/10)
		ground := nav.Towards(g.Steer.Add(weave), h.plan.Water.SpeedKn).Add(h.plan.Water.Current)
		at = at.Add(ground.For(time.Second))
	}
	return worstM, false
}

func square(t *testing.T, drift nav.Velocity) Plan {
	t.Helper()
	legs, err := Square(70, 185.2, 8, Right)
	if err != nil {
		t.Fatal(err)
	}
	return Plan{
		Legs: legs, Datum: nav.PositionFromDegrees(54.1, 7.9), Begin: begin,
		Water: Water{SpeedKn: 5, Current: nav.Towards(110, 1.2), DatumDrift: drift},
	}
}

// A helm that weaves by 8 degrees, with a receiver that jumps by 0.2 nm now
// and then, completes the pattern in a current, on a datum that drifts with
// wind as well.
func TestHelmCompletesThePattern(t *testing.T) {
	for seed := range uint64(20) {
		p := square(t, nav.Towards(100, 1.5))
		glitches := map[int]nav.Offset{}
		rng := rand.New(rand.NewPCG(seed, 3))
		for range 20 {
			glitches[rng.IntN(2500)] = nav.Along(nav.True(rng.Float64()*360), 0.2*nav.MetresPerNM)
		}
		h := helm{plan: p, weaveDeg: 8, glitches: glitches, rng: rng}
		worst, done := h.sail(t, 2*time.Duration(LengthM(p.Legs)/(5*nav.MsPerKn))*time.Second)
		if !done {
			t.Fatalf("seed %d: the pattern is not completed", seed)
		}
		for leg, off := range worst {
			if off > 60 { // a third of the spacing
				t.Errorf("seed %d: %v m off leg %d", seed, off, leg+1)
			}
		}
	}
}

// On the leg the heading is that of the table; off it, it leads back.
func TestGuideLeadsBack(t *testing.T) {
	p := square(t, nav.Velocity{})
	p.Water.Current = nav.Velocity{}
	plane := nav.NewPlane(p.Datum)
	middle := p.Legs[0].From.Add(nav.Along(p.Legs[0].Course, 90))
	for _, tt := range []struct{ right, leads float64 }{{0, 0}, {30, -1}, {-30, 1}, {2000, -closingDeg}} {
		off := middle.Add(nav.Along(p.Legs[0].Course.Add(90), tt.right))
		g, err := p.Guide(0, plane.Position(off), begin, 0)
		if err != nil {
			t.Fatal(err)
		}
		near(t, "off the leg", g.CrossM, tt.right, 0.01)
		turn := g.Steer.Minus(p.Legs[0].Course)
		if tt.leads == 0 && math.Abs(turn) > 0.01 || tt.leads*turn < 0 || math.Abs(turn) > closingDeg {
			t.Errorf("%v m to the right: steers %v degrees off the leg", tt.right, turn)
		}
	}
}

// A single wild fix does not advance the leg.
func TestGlitchDoesNotAdvance(t *testing.T) {
	p := square(t, nav.Velocity{})
	done := Guidance{Done: true}
	leg, since := p.Advance(2, done, begin, nav.None[time.Time]())
	if leg != 2 || !since.IsSet() {
		t.Fatalf("leg %d after one fix", leg)
	}
	leg, since = p.Advance(leg, Guidance{}, begin.Add(time.Second), since)
	if leg != 2 || since.IsSet() {
		t.Fatalf("the wild fix is not forgotten")
	}
	leg, since = p.Advance(leg, done, begin.Add(2*time.Second), since)
	leg, since = p.Advance(leg, done, begin.Add(3*time.Second), since)
	leg, _ = p.Advance(leg, done, begin.Add(4*time.Second), since)
	if leg != 3 {
		t.Errorf("leg %d after two seconds at its end", leg)
	}
}

func BenchmarkGuide(b *testing.B) {
	legs, _ := Square(70, 185.2, 20, Right)
	p := Plan{Legs: legs, Datum: nav.PositionFromDegrees(54.1, 7.9), Begin: begin, Water: Water{SpeedKn: 5, Current: nav.Towards(110, 1.2)}}
	own := p.Datum.Shift(nav.Along(30, 200))
	for b.Loop() {
		if _, err := p.Guide(3, own, begin.Add(time.Minute), 20); err != nil {
			b.Fatal(err)
		}
	}
}
