package nav

import (
	"math"
	"testing"
	"time"

	"pgregory.net/rapid"
)

func TestKnot(t *testing.T) {
	// 1852 m in 3600 s.
	if got := Towards(0, 1).For(time.Hour).RangeM(); math.Abs(got-1852) > 1e-9 {
		t.Errorf("a knot for an hour is %v m, want 1852", got)
	}
	if got := Towards(123, 7.5).SpeedKn(); math.Abs(got-7.5) > 1e-14 {
		t.Errorf("7.5 kn are %v kn", got)
	}
}

func TestVelocityDirections(t *testing.T) {
	const ms = 3600 / 1852.0 // a metre per second in knots
	for _, c := range []struct {
		name        string
		v           Velocity
		east, north float64
	}{
		{"towards north", Towards(0, ms), 0, 1},
		{"towards east", Towards(90, ms), 1, 0},
		{"towards south", Towards(180, ms), 0, -1},
		{"towards west", Towards(270, ms), -1, 0},
		{"wind from north blows south", BlowingFrom(0, ms), 0, -1},
		{"wind from west blows east", BlowingFrom(270, ms), 1, 0},
		{"north turned to the right", Velocity{0, 1}.Rotate(90), 1, 0},
		{"east turned to the left", Velocity{1, 0}.Rotate(-90), 0, 1},
		{"turned around", Velocity{1, 2}.Rotate(180), -1, -2},
		{"sum", Velocity{1, 2}.Add(Velocity{3, -5}), 4, -3},
		{"difference", Velocity{1, 2}.Sub(Velocity{3, -5}), -2, 7},
		{"double", Velocity{1, -2}.Scale(2), 2, -4},
	} {
		if math.Abs(c.v.EastMs-c.east) > 1e-15 || math.Abs(c.v.NorthMs-c.north) > 1e-15 {
			t.Errorf("%s: %+v, want %v east, %v north", c.name, c.v, c.east, c.north)
		}
	}
}

// TestCurrentTriangle: 6 kn through the water towards north, a set of 2.5 kn
// towards east: 6.5 kn over the ground (a triangle of 5, 12, 13), towards the
// angle of tangent 5/12.
func TestCurrentTriangle(t *testing.T) {
	ground := Towards(0, 6).Add(Towards(90, 2.5))
	course, ok := ground.Direction().Get()
	if want := math.Atan2(5, 12) * 180 / math.Pi; !ok || math.Abs(float64(course)-want) > 1e-12 {
		t.Errorf("course %v, want %v", course, want)
	}
	if math.Abs(ground.SpeedKn()-6.5) > 1e-12 {
		t.Errorf("speed %v, want 6.5", ground.SpeedKn())
	}
}

func TestDirectionAbsent(t *testing.T) {
	for _, d := range []Opt[TrueDeg]{
		Velocity{}.Direction(), Offset{}.Direction(), Towards(90, 0).Direction(),
		Velocity{math.NaN(), 1}.Direction(), Offset{1, math.NaN()}.Direction(),
	} {
		if d.IsSet() {
			t.Errorf("direction %v, want none", d)
		}
	}
}

func TestOffsetReturns(t *testing.T) {
	rapid.Check(t, func(t *rapid.T) {
		dir := True(rapid.Float64Range(0, 360).Draw(t, "dir"))
		rangeM := rapid.Float64Range(1e-3, 1e6).Draw(t, "rangeM")
		o := Along(dir, rangeM)
		back, ok := o.Direction().Get()
		// A few rounding units, of 360 degrees and of the range.
		if !ok || math.Abs(back.Minus(dir)) > 3e-13 || math.Abs(o.RangeM()-rangeM) > 1e-15*rangeM {
			t.Fatalf("%v m towards %v came back as %v towards %v", rangeM, dir, o.RangeM(), back)
		}
		if sum := o.Add(o.Scale(-1)); sum != (Offset{}) {
			t.Fatalf("there and back: %+v", sum)
		}
		if d := o.Sub(o); d != (Offset{}) {
			t.Fatalf("less itself: %+v", d)
		}
	})
}
