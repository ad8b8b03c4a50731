package nav

import (
	"math"
	"testing"

	"pgregory.net/rapid"
)

func TestPlaneReturns(t *testing.T) {
	rapid.Check(t, func(t *rapid.T) {
		pl := NewPlane(anyPosition(t, "origin"))
		rangeM := rapid.OneOf(rapid.Float64Range(0, 10), rapid.Float64Range(0, 1e5), rapid.Float64Range(0, minHalfM)).Draw(t, "rangeM")
		o := Along(True(rapid.Float64Range(0, 360).Draw(t, "dir")), rangeM)
		back := pl.Offset(pl.Position(o))
		// The end is held to stepM; towards the antipode, where the map is
		// stretched, that is as much more on the map as m12 is less than range.
		stretched := max(1, rangeM/math.Max(1, math.Abs(solveInverse(pl.origin, pl.Position(o)).reducedM)))
		if d := back.Sub(o).RangeM(); !(d <= stepM*stretched+1e-15*rangeM) {
			t.Fatalf("%+v came back as %+v, %v m off", o, back, d)
		}
	})
}

// TestPlaneExact checks range and bearing from the origin against the
// geodesic, which the comment of Plane calls exact.
func TestPlaneExact(t *testing.T) {
	rapid.Check(t, func(t *rapid.T) {
		a, b := anyPosition(t, "a"), anyPosition(t, "b")
		o := NewPlane(a).Offset(b)
		line := Inverse(a, b)
		if !(math.Abs(o.RangeM()-line.RangeM) <= 1e-15*line.RangeM*4) {
			t.Fatalf("range %v, geodesic %v", o.RangeM(), line.RangeM)
		}
		dir, ok := o.Direction().Get()
		if ok != line.Bearing.IsSet() || ok && !(math.Abs(dir.Minus(line.Bearing.Or(0))) <= 3e-13) {
			t.Fatalf("direction %v, geodesic %v", dir, line.Bearing)
		}
	})
}

// TestPlaneScale checks the claim that between two points of the map other
// than the origin, at range r at most, the scale is off by about (r/R)²/6 at
// most, with the smallest and largest radius of curvature around: it is at its
// largest across the way from the origin.
func TestPlaneScale(t *testing.T) {
	const smallestR = semiMinorM * axisRatio // b²/a, along the meridian at the equator
	for _, lat := range []float64{-90, -60, 0, 20, 54, 89.9} {
		pl := NewPlane(PositionFromDegrees(lat, 7))
		for _, rangeM := range []float64{1e3, 1e4, 1e5} {
			claim := rangeM / smallestR * rangeM / smallestR / 6
			for dir := 0.0; dir < 360; dir += 15 {
				from := Along(True(dir), rangeM)
				across := Along(True(dir+90), rangeM/100)
				along := Along(True(dir), -rangeM/100)
				// 1e-8 m is what two positions are held to, over the length; the
				// claim's next term is 7/360 (r/R)⁴, hidden by a hundredth more.
				limit := claim*1.01 + 2e-8/(rangeM/100)
				if off := scaleOff(pl, from, across); !(math.Abs(off) <= limit) || rangeM >= 1e4 && !(off < -0.9*claim*smallestR/6.4e6*smallestR/6.4e6) {
					t.Errorf("lat %v, %v m towards %v, across: off by %.3g, claim %.3g", lat, rangeM, dir, off, claim)
				}
				if off := scaleOff(pl, from, along); !(math.Abs(off) <= limit) {
					t.Errorf("lat %v, %v m towards %v, along: off by %.3g, claim %.3g", lat, rangeM, dir, off, claim)
				}
			}
		}
	}
	// The figures in the comment: metres a kilometre, to the digits given.
	for _, c := range []struct{ rangeM, want, half float64 }{{1e5, 0.04, 0.005}, {1e4, 0.0004, 0.00005}} {
		pl := NewPlane(PositionFromDegrees(54, 7))
		if off := -1000 * scaleOff(pl, Along(30, c.rangeM), Along(120, 100)); math.Abs(off-c.want) > c.half {
			t.Errorf("at %v m: %.5f m a kilometre, want %v", c.rangeM, off, c.want)
		}
	}
}

// scaleOff is by how much, relatively, the true distance from one point of the
// map to another, on both sides of from, differs from that on the map.
func scaleOff(pl Plane, from, step Offset) float64 {
	p, q := pl.Position(from.Sub(step.Scale(0.5))), pl.Position(from.Add(step.Scale(0.5)))
	return Inverse(p, q).RangeM/step.RangeM() - 1
}

func TestPlaneEdges(t *testing.T) {
	a := PositionFromDegrees(54, 7)
	pl := NewPlane(a)
	if pl.Origin() != a || pl.Offset(a) != (Offset{}) || pl.Position(Offset{}) != a {
		t.Error("the origin is not at zero")
	}
	for _, o := range []Offset{
		pl.Offset(PositionFromDegrees(math.NaN(), 0)),
		NewPlane(PositionFromDegrees(0, math.NaN())).Offset(a),
	} {
		if !math.IsNaN(o.EastM) || !math.IsNaN(o.NorthM) {
			t.Errorf("offset of what is no position: %+v, want NaN", o)
		}
	}
	for _, o := range []Offset{{math.NaN(), 0}, {0, math.NaN()}, {math.Inf(1), 0}} {
		if p := pl.Position(o); !math.IsNaN(p.LatDeg()) || !math.IsNaN(p.LonDeg()) {
			t.Errorf("position off by %+v: %v, want NaN", o, p)
		}
	}
	// At the North Pole the map's north is along 180° from the origin's
	// longitude, across the pole, and east along 90° more than it.
	north := NewPlane(PositionFromDegrees(90, 10))
	o := north.Offset(PositionFromDegrees(89, 100))
	if !(o.EastM > 111e3) || !(math.Abs(o.NorthM) < 1e-7) {
		t.Errorf("90 degrees east of the pole's longitude: %+v", o)
	}
	// Across the antimeridian there is no jump.
	o = NewPlane(PositionFromDegrees(0, 179.9)).Offset(PositionFromDegrees(0, -179.9))
	if math.Abs(o.EastM-semiMajorM*0.2*math.Pi/180) > 1e-7 {
		t.Errorf("across the antimeridian: %+v", o)
	}
}
