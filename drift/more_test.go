package drift_test

import (
	"math"
	"testing"
	"time"

	"wakeback/drift"
	"wakeback/drift/nav"
)

// A member that falls within a step drifts for the rest of it only.
func TestFallWithinStep(t *testing.T) {
	c := openWater(t, drift.Class{ID: "none"}, nav.Velocity{}, nav.Velocity{EastMs: 1}, 0, 0)
	c.FellTo = c.FellFrom.Add(30 * time.Second)
	for seconds, want := range map[int][2]float64{20: {0, 20}, 60: {30, 60}, 75: {45, 75}, 600: {570, 600}} {
		cl := cloudAt(t, c, drift.Options{Members: 2000, Seed: 1}, c.FellFrom.Add(time.Duration(seconds)*time.Second))
		east, _ := cl.Points()
		lo, hi := math.Inf(1), 0.0
		for _, e := range east {
			lo, hi = min(lo, e), max(hi, e)
		}
		// The ends of 2000 even draws from 30 s are within 0.3 s of the window's.
		near(t, "least drift", lo, want[0], 0.3)
		near(t, "most drift", hi, want[1], 0.3)
	}
}

// Jibing of derived components: the sides change as with published ones.
func TestDerivedClassJibes(t *testing.T) {
	person := class(t, "person")
	person.JibesPerHour = 1
	c := openWater(t, person, nav.BlowingFrom(180, 15), nav.Velocity{}, 0, 0)
	_, _, sdE, _, _ := pooled(t, c, drift.Model{}, clock("14:00"))
	T, rate := 4.0, 1.0
	v := T/rate - (1-math.Exp(-2*rate*T))/(2*rate*rate) // hours squared, equation 8 of the closed forms
	l := 0.235 * nav.MetresPerNM                        // an hour's leeway
	want := l * math.Sqrt(v*1.09*(0.5-math.Sin(math.Pi/3)/(4*math.Pi/6)))
	// Sides that are decided every four minutes keep their correlation there, and
	// lack (2 rate dt)²/12 = 1.5e-3 of the variance between.
	near(t, "SD crosswind", sdE, want, sdTol(want)+1e-3*want)
}

// The time of the fall not being known adds its part to the total error.
func TestTimeError(t *testing.T) {
	c := openWater(t, drift.Class{ID: "none"}, nav.Velocity{}, nav.Towards(90, 2), 0, 0)
	c.FellTo = c.FellFrom.Add(30 * time.Minute)
	d := datumAt(t, c, clock("12:00"))
	near(t, "drift from the middle, NM", d.Shift.RangeM()/nav.MetresPerNM, 2*1.75, 1e-9)
	near(t, "probable error, NM", d.Errors.TimeM/nav.MetresPerNM, 2*0.5/math.Sqrt(12)*drift.Radius50, 1e-9)
	_, _, sdE, _, _ := pooled(t, c, drift.Model{}, clock("12:00"))
	near(t, "the cloud's SD", sdE*drift.Radius50, d.Errors.TimeM, sdTol(d.Errors.TimeM))
}

// Each moment of a corridor is the datum of a point: that of the vessel then.
func TestCorridorIsMadeOfDatums(t *testing.T) {
	c := benchCase(t)
	c.Start.Path = nav.NewTrack([]nav.Fix{
		{At: clock("10:00"), Position: position(t, "50N 001W"), ErrorM: nav.Some(20.0)},
		{At: clock("12:00"), Position: position(t, "50 04N 001W"), ErrorM: nav.Some(20.0)},
	})
	c.FellTo = clock("12:00")
	d := datumAt(t, c, clock("13:00"))
	if len(d.Corridor) < 20 {
		t.Fatalf("%d moments", len(d.Corridor))
	}
	for _, p := range d.Corridor {
		one := c
		one.Start, one.FellFrom, one.FellTo = drift.Start{Position: p.From, Error95M: nav.Some(20.0)}, p.FellAt, p.FellAt
		want := datumAt(t, one, clock("13:00"))
		at, _ := want.Point.Get()
		left, _ := want.Left.Get()
		// The two planes' norths differ by nothing on one meridian; distances by
		// less than a millimetre in 7 km.
		near(t, "point", nav.Inverse(p.Point, at).RangeM, 0, 0.01)
		near(t, "left", nav.Inverse(p.Left, left).RangeM, 0, 0.01)
		near(t, "probable error", p.ProbableErrorM, want.TotalProbableErrorM, 1e-6)
	}
}

// What the cloud's past was made of makes it anew when it changes.
func TestUpdateSeesEveryInput(t *testing.T) {
	base := benchCase(t)
	for name, change := range map[string]func(*drift.Case){
		"class": func(c *drift.Case) { c.Class.Slope *= 1.1 },
		"jibes": func(c *drift.Case) { c.Class.JibesPerHour = 0.06 },
		"start": func(c *drift.Case) { c.Start.Position = position(t, "50 00.1N 001W") },
		"error": func(c *drift.Case) { c.Start.Error95M = nav.Some(77.0) },
		"time":  func(c *drift.Case) { c.FellTo = c.FellTo.Add(time.Minute) },
		"wind":  func(c *drift.Case) { c.Winds = winds(t, windFrom(clock("10:00"), 241, 15)) },
		"current east": func(c *drift.Case) {
			s := c.Currents.Samples()
			s[0].Velocity.EastMs += 0.1
			c.Currents = currents(t, s...)
		},
		"wind drift": func(c *drift.Case) { c.WindDriven = true; c.Currents = currents(t) },
		"coast":      func(c *drift.Case) { c.Coast = wall{50_000} },
		"path": func(c *drift.Case) {
			c.Start.Path = nav.NewTrack([]nav.Fix{{At: clock("10:00"), Position: position(t, "50N 001W")}})
		},
	} {
		cl := cloudAt(t, base, drift.Options{Members: 50, Seed: 1}, clock("11:00"))
		c := base
		change(&c)
		if rebuilt, err := cl.Update(c); err != nil || !rebuilt {
			t.Errorf("%s: rebuilt %v, %v", name, rebuilt, err)
		}
		samePoints(t, cl, cloudAt(t, c, drift.Options{Members: 50, Seed: 1}, clock("11:00")))
	}
}

// The edge of a region follows the density, not the cells it is kept in.
func TestRegionEdgeIsSmooth(t *testing.T) {
	c := openWater(t, drift.Class{ID: "none"}, nav.Velocity{}, nav.Velocity{}, 0, 0)
	c.Start.Error95M = nav.Some(1000.0)
	cl := cloudAt(t, c, drift.Options{Members: 100_000, Seed: 1}, c.FellFrom)
	var g gather
	for _, p := range cl.Regions(0.5)[0].Rings[0] {
		g.add(p.RangeM())
	}
	// Crossings in the middle of cells of an eighth of an s.d. would scatter by a
	// 28th of it, 3 % of this radius, and the members' own noise by 1 %.
	if sd := math.Sqrt(g.squares/g.n-g.mean()*g.mean()) / g.mean(); !(sd < 0.02) {
		t.Errorf("the edge scatters by %v of its radius", sd)
	}
}
