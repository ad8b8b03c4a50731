package plan

import (
	"errors"
	"math"
	"strings"
	"testing"
	"time"

	"pgregory.net/rapid"

	"wakeback/drift/nav"
	"wakeback/search/detect"
	"wakeback/search/pattern"
)

func scene(errorM float64) Scene {
	return Scene{
		Now: time.Date(2026, 6, 1, 2, 0, 0, 0, time.UTC), Datum: nav.PositionFromDegrees(54.1, 7.9),
		ErrorM: errorM, DatumDrift: nav.Towards(100, 1.2), Current: nav.Towards(100, 1),
		WindFrom: nav.Some(nav.TrueDeg(240)), SpeedKn: 6,
		Conditions: detect.Conditions{Object: detect.PersonInWater, VisibilityNM: 10, WindKn: 18, Tired: true},
	}
}

func near(t testing.TB, what string, got, want, tolerance float64) {
	t.Helper()
	if math.IsNaN(got) || math.Abs(got-want) > tolerance {
		t.Errorf("%s = %v, want %v within %v", what, got, want, tolerance)
	}
}

// A well known place gives a sector search, a less well known one a square
// that grows over the error. The sweep width of 0.135 nm is the worked product
// of factors of JP 3-50 (0.3 x 0.5 x 0.9).
func TestPatternByTheError(t *testing.T) {
	small, err := Propose(scene(300))
	if err != nil {
		t.Fatal(err)
	}
	if small[0].Pattern != "sector" {
		t.Errorf("error of 300 m: %s first", small[0].Pattern)
	}
	near(t, "sweep width", small[0].WidthNM, 0.135, 1e-9)
	near(t, "radius", small[0].RadiusNM, 0.27, 1e-9)
	near(t, "coverage at mid-leg", small[0].Coverage, 1, 1e-9)
	near(t, "first leg down the drift", float64(small[0].First), 100, 1e-9)
	near(t, "length", small[0].LengthM, 9*0.27*nav.MetresPerNM, 1e-6)

	large, err := Propose(scene(900))
	if err != nil {
		t.Fatal(err)
	}
	sq := large[0]
	if sq.Pattern != "square" || !sq.Covers {
		t.Fatalf("error of 900 m: %+v", sq)
	}
	near(t, "first leg into the wind", float64(sq.First), 240, 1e-9)
	near(t, "POD in good conditions", sq.PODIdeal, 0.789909, 1e-6)
	near(t, "POD at worst", sq.PODPoor, 0.632121, 1e-6)
	if sq.Reason == "" || large[1].Reason == "" {
		t.Error("no reason")
	}
}

func TestFirstLegIsASetting(t *testing.T) {
	s := scene(900)
	s.FirstInto = DownDrift
	p, _ := Propose(s)
	near(t, "down the drift", float64(p[0].First), 100, 1e-9)
	s.Passes = 1
	p, _ = Propose(s)
	near(t, "second search turned by 45", float64(p[0].First), 145, 1e-9)
	near(t, "second sector turned by 30", float64(p[1].First), 130, 1e-9)
}

func TestWidthAtNightIsNotInvented(t *testing.T) {
	s := scene(300)
	s.Conditions.Night = true
	w, by, notes, err := s.Width()
	if err != nil || w != detect.CoastalSpacingNM || by == "" || len(notes) == 0 || !strings.Contains(notes[0], "night") {
		t.Errorf("night: %v %q %q %v", w, by, notes, err)
	}
	s.MeasuredWidthNM = nav.Some(0.05)
	if w, by, _, _ := s.Width(); w != 0.05 || !strings.Contains(by, "measured") {
		t.Errorf("measured: %v %q", w, by)
	}
}

func TestTurningCircleSetsTheSpacing(t *testing.T) {
	s := scene(900)
	s.TurnDiameterM = nav.Some(400.0)
	p, err := Propose(s)
	if err != nil {
		t.Fatal(err)
	}
	near(t, "spacing", p[0].SpacingNM*nav.MetresPerNM, 800, 1e-6)
	if p[0].Coverage >= 0.5 || !strings.Contains(strings.Join(p[0].Notes, " "), "turning circle") {
		t.Errorf("coverage %v, notes %q", p[0].Coverage, p[0].Notes)
	}
}

func TestDatumFasterThanTheBoat(t *testing.T) {
	s := scene(300)
	s.SpeedKn, s.DatumDrift, s.Current = 2, nav.Towards(0, 4), nav.Velocity{}
	if _, err := Propose(s); !errors.Is(err, pattern.ErrNotMadeGood) {
		t.Errorf("err = %v", err)
	}
}

// Whatever the scene, a plan fits its limit once it is more than one block,
// covers what it says, and never promises more in poor conditions.
func TestPlansHoldWhatTheySay(t *testing.T) {
	rapid.Check(t, func(rt *rapid.T) {
		s := scene(rapid.Float64Range(10, 3000).Draw(rt, "error"))
		s.Conditions.WindKn = rapid.Float64Range(0, 40).Draw(rt, "wind")
		s.Limit = time.Duration(rapid.IntRange(10, 300).Draw(rt, "minutes")) * time.Minute
		s.DatumDrift = s.Current // the stream carries both
		proposals, err := Propose(s)
		if err != nil {
			rt.Fatal(err)
		}
		for _, p := range proposals {
			if p.PODPoor > p.PODIdeal || p.PODIdeal > 1 {
				rt.Fatalf("%s: POD %v and %v", p.Pattern, p.PODIdeal, p.PODPoor)
			}
			if p.Pattern == "square" && len(p.Legs) > 5 && p.TakesS > s.Limit.Seconds() {
				rt.Fatalf("takes %v s, limit %v", p.TakesS, s.Limit)
			}
			if last := p.Legs[len(p.Legs)-1]; p.Pattern == "sector" && last.To.RangeM() > 1 {
				rt.Fatalf("the sector search does not end at the datum")
			}
		}
	})
}
