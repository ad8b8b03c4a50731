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

func yacht(t testing.TB) Model { return vessels(t)["yacht12m"] }

// The helm is shifted at 150, midships at 290, steady 270: a Williamson turn
// to starboard from 090 (arithmetic on the angles of the IAMSAR Manual vol.
// III as reprinted); Scharnow from 000: 240, 200, 180; single: 250.
func TestHelmOrders(t *testing.T) {
	tests := []struct {
		name    Name
		heading nav.TrueDeg
		side    Side
		until   []nav.TrueDeg
		helm    []Helm
	}{
		{Williamson, 90, Starboard, []nav.TrueDeg{150, 290, 270}, []Helm{1, -1, 0}},
		{Williamson, 350, Starboard, []nav.TrueDeg{50, 190, 170}, []Helm{1, -1, 0}},
		{Williamson, 90, Port, []nav.TrueDeg{30, 250, 270}, []Helm{-1, 1, 0}},
		{Scharnow, 0, Starboard, []nav.TrueDeg{240, 200, 180}, []Helm{1, -1, 0}},
		{Single, 0, Starboard, []nav.TrueDeg{250}, []Helm{1}},
	}
	for _, tt := range tests {
		r, err := Plan(tt.name, Case{Model: yacht(t), Heading: tt.heading, Side: tt.side, Delay: 10 * time.Minute})
		if err != nil {
			t.Errorf("%s: %v", tt.name, err)
			continue
		}
		for i, o := range r.Orders {
			if math.Abs(o.Until.Minus(tt.until[i])) > 1e-9 || o.Helm != tt.helm[i] {
				t.Errorf("%s from %s: order %d is helm %v until %s, want %v until %s", tt.name, tt.heading, i+1, o.Helm, o.Until, tt.helm[i], tt.until[i])
			}
		}
	}
}

// Nobody saw the side: no way to turn is advised, both can be looked at.
func TestScenario13NoSideNoTurn(t *testing.T) {
	c := Case{Model: yacht(t), Heading: 40}
	if _, err := Plan(Williamson, c); !errors.Is(err, ErrManoeuvre) || !strings.Contains(err.Error(), "side of the fall is unknown") {
		t.Fatalf("err = %v", err)
	}
	port, starboard, err := Both(Williamson, c)
	if err != nil || port.Side != Port || starboard.Side != Starboard {
		t.Fatalf("both: %v", err)
	}
	near(t, "in still water both take the same time", port.TotalS, starboard.TotalS, 0.5)
	if choices, err := Best(c, InSight); len(choices) != 0 || err == nil {
		t.Errorf("%d choices without a side", len(choices))
	}
}

func TestScharnowNeedsTheRun(t *testing.T) {
	c := Case{Model: yacht(t), Side: Port, Delay: 5 * time.Second}
	if _, err := Plan(Scharnow, c); !errors.Is(err, ErrManoeuvre) || !strings.Contains(err.Error(), "beyond the person") {
		t.Errorf("after 5 s: %v", err)
	}
	c.Delay = 2 * time.Minute
	if _, err := Plan(Scharnow, c); err != nil {
		t.Errorf("after 2 min: %v", err)
	}
}

func TestBestForTheCase(t *testing.T) {
	first := func(c Case, s Sight) Name {
		choices, _ := Best(c, s)
		if len(choices) == 0 {
			t.Fatalf("no choice for %+v", c)
		}
		if choices[0].Reason == "" {
			t.Errorf("no reason")
		}
		return choices[0].Name
	}
	if got := first(Case{Model: yacht(t), Side: Port}, InSight); keepsSight(got) == 0 {
		t.Errorf("in sight: %s", got)
	}
	if got := first(Case{Model: yacht(t), Side: Port, Delay: time.Minute}, Reported); got != Williamson {
		t.Errorf("reported: %s", got)
	}
	missing, _ := Best(Case{Model: yacht(t), Side: Port, Delay: time.Hour}, Missing)
	if slices.ContainsFunc(missing, func(c Choice) bool { return c.Name == Single }) {
		t.Errorf("a single turn for a person missing")
	}
}

func randomModel(rt *rapid.T) Model {
	u := rapid.Float64Range(2, 10).Draw(rt, "speed")
	// Nothing afloat turns with more than a third of g across: 3 m/s².
	r := max(10, u*u/3) * rapid.Float64Range(1, 10).Draw(rt, "radius")
	return Model{
		SpeedMs: u, RadiusM: r,
		LagS:       r / u * rapid.Float64Range(0.1, 0.6).Draw(rt, "lag"),
		SpeedRatio: rapid.Float64Range(0.5, 0.95).Draw(rt, "ratio"),
		SpeedLagS:  r / u * rapid.Float64Range(0.5, 2).Draw(rt, "speed lag"),
		PivotM:     rapid.Float64Range(0, 0.2).Draw(rt, "pivot") * r,
		// The wheel goes over in at most the time to run one radius, as on the
		// vessels of the table.
		RudderDeg: 35, RudderRate: 35 * u / r / rapid.Float64Range(0.2, 1).Draw(rt, "wheel over"),
		OrderDelayS: r / u * rapid.Float64Range(0, 0.3).Draw(rt, "delay"),
	}
}

func randomSide(rt *rapid.T) Side {
	return rapid.SampledFrom([]Side{Port, Starboard}).Draw(rt, "side")
}

// A Williamson turn comes onto the reciprocal within 5 degrees, and with this
// vessel's own angle within a tenth of the turning diameter of the old track.
func TestWilliamsonProperty(t *testing.T) {
	rapid.Check(t, func(rt *rapid.T) {
		m := randomModel(rt)
		shift, _, err := m.OwnShiftDeg(Williamson)
		if err != nil {
			rt.Fatal(err)
		}
		got, err := m.Trial(Williamson, shift)
		if err != nil {
			rt.Fatal(err)
		}
		if math.Abs(got.EndDeg+180) > 5 {
			rt.Fatalf("ends on %v", got.EndDeg)
		}
		if math.Abs(got.OffsetM) > 0.1*2*m.RadiusM {
			rt.Fatalf("own angle %v leaves %v m of a diameter of %v", shift, got.OffsetM, 2*m.RadiusM)
		}
	})
}

// A single turn begun at once comes back to the place of the fall, and every
// manoeuvre that applies comes back to the person, drifting or not.
func TestComesBackToThePerson(t *testing.T) {
	rapid.Check(t, func(rt *rapid.T) {
		c := Case{
			Model: randomModel(rt), Side: randomSide(rt),
			Heading:     nav.True(rapid.Float64Range(0, 360).Draw(rt, "heading")),
			Delay:       time.Duration(rapid.IntRange(0, 300).Draw(rt, "delay s")) * time.Second,
			PersonDrift: nav.Towards(nav.True(rapid.Float64Range(0, 360).Draw(rt, "towards")), rapid.Float64Range(0, 0.5).Draw(rt, "leeway")),
		}
		for _, n := range []Name{Single, Williamson, Scharnow, RaceTrack, SlowCircle} {
			r, err := Plan(n, c)
			if errors.Is(err, ErrManoeuvre) && n == Scharnow {
				continue
			}
			if err != nil {
				rt.Fatalf("%s: %v", n, err)
			}
			if r.ClosestM > c.Model.RadiusM {
				rt.Fatalf("%s passes %v m off, radius %v", n, r.ClosestM, c.Model.RadiusM)
			}
			for i, o := range r.Orders[1:] {
				if o.AtS < r.Orders[i].AtS {
					rt.Fatalf("%s: orders run backwards", n)
				}
			}
			if r.TotalS < r.TurnedS || len(r.Path) < 2 {
				rt.Fatalf("%s: %v s in all, %v s turned, %d points", n, r.TotalS, r.TurnedS, len(r.Path))
			}
		}
	})
}

// Port is the mirror of starboard.
func TestMirror(t *testing.T) {
	m := yacht(t)
	p, _ := Plan(Williamson, Case{Model: m, Side: Port, Delay: 30 * time.Second})
	s, _ := Plan(Williamson, Case{Model: m, Side: Starboard, Delay: 30 * time.Second})
	for i := range min(len(p.Path), len(s.Path)) {
		near(t, "east", p.Path[i].Offset.EastM, -s.Path[i].Offset.EastM, 1e-6)
		near(t, "north", p.Path[i].Offset.NorthM, s.Path[i].Offset.NorthM, 1e-6)
	}
}
