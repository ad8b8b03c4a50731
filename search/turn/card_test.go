package turn

import (
	"errors"
	"math"
	"strings"
	"testing"

	"pgregory.net/rapid"

	"wakeback/drift/nav"
)

func TestNoSailCardWithoutWind(t *testing.T) {
	for _, n := range []Name{QuickStop, ReachTack, FigureEight, HeaveTo} {
		if _, err := SailCard(n, SailCase{LengthM: 12}); !errors.Is(err, ErrNoWind) || !errors.Is(err, ErrManoeuvre) {
			t.Errorf("%s: %v", n, err)
		}
	}
	if _, err := SailCard(Williamson, SailCase{LengthM: 12, WindFrom: nav.Some[nav.TrueDeg](0)}); !errors.Is(err, ErrManoeuvre) {
		t.Errorf("no such card: %v", err)
	}
}

// Wind north: the wind comes over
// the starboard side when the heading is west of it, so headings lie west of
// the wind on starboard tack and east of it on port tack.
func TestReachTackHeadings(t *testing.T) {
	for _, tt := range []struct{ heading, out, back nav.TrueDeg }{
		{270, 255, 60}, {90, 105, 300},
	} {
		c, err := SailCard(ReachTack, SailCase{Heading: tt.heading, WindFrom: nav.Some[nav.TrueDeg](0), LengthM: 10})
		if err != nil {
			t.Fatal(err)
		}
		got := map[StepCode]nav.TrueDeg{}
		for _, s := range c.Steps {
			if h, ok := s.Heading.Get(); ok {
				got[s.Code] = h
			}
		}
		if got["deep_beam_reach"] != tt.out || got["point_at_casualty"] != tt.back {
			t.Errorf("from %s: %v", tt.heading, got)
		}
	}
}

func TestFigureEightBothDistances(t *testing.T) {
	for short, want := range map[bool][2]float64{false: {60, 80}, true: {30, 40}} {
		c, err := SailCard(FigureEight, SailCase{WindFrom: nav.Some[nav.TrueDeg](90), LengthM: 10, Short: short})
		if err != nil {
			t.Fatal(err)
		}
		if m := c.Steps[1].M.Or([2]float64{}); m != want {
			t.Errorf("short %v: %v m", short, m)
		}
	}
}

// Every heading lies at its angle off the wind, turning wind and heading turns
// all headings alike, and each card says when, with what care and from where.
func TestSailCardProperties(t *testing.T) {
	rapid.Check(t, func(rt *rapid.T) {
		wind := nav.True(rapid.Float64Range(0, 360).Draw(rt, "wind"))
		c := SailCase{Heading: nav.True(rapid.Float64Range(0, 360).Draw(rt, "heading")), WindFrom: nav.Some(wind), LengthM: 11}
		n := rapid.SampledFrom([]Name{QuickStop, ReachTack, FigureEight, HeaveTo}).Draw(rt, "name")
		card, err := SailCard(n, c)
		if err != nil {
			rt.Fatal(err)
		}
		checkCard(rt, card)
		for _, s := range card.Steps {
			h, ok := s.Heading.Get()
			if ok && math.Abs(math.Abs(h.Minus(wind))-s.OffWindDeg.Or(-1)) > 1e-9 {
				rt.Fatalf("%s: heading %s is not %v off %s", s.Code, h, s.OffWindDeg.Or(-1), wind)
			}
		}
	})
}

func checkCard(t interface{ Fatalf(string, ...any) }, c Card) {
	if c.When == "" || len(c.Cautions) == 0 || len(c.Sources) == 0 || len(c.Steps) < 4 {
		t.Fatalf("card %+v", c)
	}
	for _, s := range c.Steps {
		if s.Code == "" || s.Text == "" || strings.Contains(s.Text, "!") {
			t.Fatalf("step %+v", s)
		}
	}
}

func TestPowerCards(t *testing.T) {
	for _, n := range []Name{StopBack, CalmingCircle} {
		c, err := PowerCard(n)
		if err != nil {
			t.Fatal(err)
		}
		checkCard(t, c)
	}
	if _, err := PowerCard(QuickStop); !errors.Is(err, ErrManoeuvre) {
		t.Errorf("quick stop without wind: %v", err)
	}
}
