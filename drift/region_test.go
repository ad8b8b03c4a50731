package drift_test

import (
	"bytes"
	"encoding/xml"
	"errors"
	"io"
	"math"
	"strings"
	"testing"
	"time"

	"wakeback/drift"
	"wakeback/drift/nav"
)

// inside reports whether a point is within the rings, holes left out.
func inside(rings [][]nav.Offset, e, n float64) bool {
	in := false
	for _, ring := range rings {
		for i, p := range ring {
			q := ring[(i+1)%len(ring)]
			if (p.NorthM > n) != (q.NorthM > n) && e < (q.EastM-p.EastM)*(n-p.NorthM)/(q.NorthM-p.NorthM)+p.EastM {
				in = !in
			}
		}
	}
	return in
}

// Each region holds its share of the members, whatever the cloud's shape.
func TestRegionsHoldTheirShare(t *testing.T) {
	humps := drift.Components{Right: drift.Regression{Slope: 0.02}, Left: drift.Regression{Slope: -0.02}}
	split := openWater(t, drift.Class{ID: "h", Components: nav.Some(humps)}, nav.BlowingFrom(200, 20), nav.Velocity{}, 0, 0.02)
	split.Start.Error95M = nav.Some(50.0)
	long := benchCase(t)
	long.Start.Path = nav.NewTrack([]nav.Fix{
		{At: clock("06:00"), Position: position(t, "50N 001W"), ErrorM: nav.Some(20.0)},
		{At: clock("08:00"), Position: position(t, "50N 000 42W"), ErrorM: nav.Some(20.0)},
		{At: clock("10:00"), Position: position(t, "50 10N 000 42W"), ErrorM: nav.Some(20.0)},
	})
	long.FellFrom, long.FellTo = clock("06:00"), clock("10:00")
	for name, c := range map[string]drift.Case{"cloud": benchCase(t), "two humps": split, "bent corridor": long} {
		t.Run(name, func(t *testing.T) {
			cl := cloudAt(t, c, drift.Options{Members: 10_000, Seed: 6}, clock("12:00"))
			east, north := cl.Points()
			regions := cl.Regions(0.5, 0.95)
			for _, r := range regions {
				held := 0.0
				for i := range east {
					if inside(r.Rings, east[i], north[i]) {
						held++
					}
				}
				// The level is that of the members' own densities; contours are
				// straight within a cell where the density is not: 1 in 100.
				near(t, "share held", held/float64(len(east)), r.Share, 0.01)
				if !(r.AreaM2 > 0) {
					t.Errorf("area %v", r.AreaM2)
				}
			}
			if !(regions[0].AreaM2 < regions[1].AreaM2) {
				t.Errorf("areas %v, %v", regions[0].AreaM2, regions[1].AreaM2)
			}
			if name == "two humps" && len(regions[0].Rings) != 2 {
				t.Errorf("%d rings around two humps", len(regions[0].Rings))
			}
		})
	}
}

// Of a circular normal cloud the regions are circles of the known radii.
func TestRegionsOfNormalCloud(t *testing.T) {
	c := openWater(t, drift.Class{ID: "none"}, nav.Velocity{}, nav.Velocity{}, 0, 0)
	c.Start.Error95M = nav.Some(1000.0)
	cl := cloudAt(t, c, drift.Options{Members: 50_000, Seed: 1}, c.FellFrom)
	sd := 1000 / drift.Radius95
	s := cl.Spread()
	// Four standard errors of a quantile: root(p(1-p)/N) over the density there.
	near(t, "R50", s.R50M, sd*drift.Radius50, 4*math.Sqrt(0.25/50_000)*sd/(drift.Radius50*0.5))
	near(t, "R95", s.R95M, 1000, 4*math.Sqrt(0.0475/50_000)*sd/(drift.Radius95*0.05))
	for i, r := range cl.Regions(0.5, 0.95) {
		radius := sd * []float64{drift.Radius50, drift.Radius95}[i]
		// The share held is exact; the radius follows it, and a ragged edge adds
		// to the area it needs: 3 %.
		near(t, "radius of the area", math.Sqrt(r.AreaM2/math.Pi), radius, 0.03*radius)
	}
}

func TestAxes(t *testing.T) {
	c := openWater(t, drift.Class{ID: "s", Components: nav.Some(drift.Components{Downwind: drift.Regression{Slope: 0.03, SyxMs: 0.3}})},
		nav.BlowingFrom(240, 20), nav.Velocity{}, 0, 0)
	s := cloudAt(t, c, drift.Options{Members: 3000, Seed: 1}, clock("12:00")).Spread()
	near(t, "axis", s.AxisDeg, 60, 1e-6)
	near(t, "minor", s.SDMinorM, 0, 1e-3)
	near(t, "major", s.SDMajorM, 0.3*(0.5+20*nav.MsPerKn/20)*7200, 4*s.SDMajorM/math.Sqrt(2*3000))
}

// A cloud without extent has numbers, and no rings.
func TestPointCloud(t *testing.T) {
	c := openWater(t, drift.Class{ID: "none"}, nav.Velocity{}, nav.Towards(90, 1), 0, 0)
	cl := cloudAt(t, c, drift.Options{Members: 10, Seed: 1}, clock("11:00"))
	s := cl.Spread()
	if s.R95M > 1e-6 || s.SDMajorM > 1e-6 || math.IsNaN(s.AxisDeg) {
		t.Errorf("spread %+v", s)
	}
	for _, r := range cl.Regions(0.5, 0.95, 0, 1, math.NaN()) {
		if len(r.Rings) != 0 {
			t.Errorf("rings %v", r.Rings)
		}
	}
	one := cloudAt(t, benchCase(t), drift.Options{Members: 1, Seed: 1}, clock("11:00"))
	if s := one.Spread(); s.R50M != 0 || s.N != 1 {
		t.Errorf("one member: %+v", s)
	}
}

// The picture is well-formed XML with the regions, the datums and no scripts.
func TestSVG(t *testing.T) {
	long := benchCase(t)
	long.Start.Path = nav.NewTrack([]nav.Fix{
		{At: clock("09:00"), Position: position(t, "50N 001W")}, {At: clock("10:00"), Position: position(t, "50N 000 50W")},
	})
	long.FellFrom = clock("09:00")
	still := openWater(t, drift.Class{ID: "none"}, nav.Velocity{}, nav.Velocity{}, 0, 0)
	named := benchCase(t)
	named.Class.Object = `<script>"&'`
	for name, c := range map[string]drift.Case{"point": benchCase(t), "corridor": long, "still": still, "named": named} {
		t.Run(name, func(t *testing.T) {
			cl := cloudAt(t, c, drift.Options{Members: 3000, Seed: 1}, clock("12:00"))
			var b bytes.Buffer
			if err := cl.SVG(&b, datumAt(t, c, clock("12:00"))); err != nil {
				t.Fatal(err)
			}
			for d := xml.NewDecoder(strings.NewReader(b.String())); ; {
				if _, err := d.Token(); errors.Is(err, io.EOF) {
					break
				} else if err != nil {
					t.Fatal(err)
				}
			}
			if text := b.String(); strings.Contains(text, "NaN") || strings.Contains(text, "<script") || !strings.Contains(text, "NM</text>") {
				t.Errorf("picture:\n%.2000s", text)
			}
		})
	}
	cl := cloudAt(t, still, drift.Options{Members: 10}, clock("12:00"))
	if err := cl.SVG(failing{}, datumAt(t, still, clock("12:00"))); !errors.Is(err, io.ErrClosedPipe) {
		t.Errorf("a writer that fails: %v", err)
	}
}

type failing struct{}

func (failing) Write([]byte) (int, error) { return 0, io.ErrClosedPipe }

func BenchmarkRegions(b *testing.B) {
	c := benchCase(b)
	cl := cloudAt(b, c, drift.Options{Members: 10_000, Seed: 1}, c.FellFrom.Add(2*time.Hour))
	for b.Loop() {
		cl.Regions(0.5, 0.95)
	}
}
