package nav

import (
	"math"
	"testing"

	"pgregory.net/rapid"
)

func TestNormDeg(t *testing.T) {
	for _, c := range []struct{ in, want, signed float64 }{
		{0, 0, 0}, {360, 0, 0}, {-360, 0, 0}, {-1, 359, -1}, {361, 1, 1}, {180, 180, 180}, {-180, 180, 180},
		{181, 181, -179}, {720.5, 0.5, 0.5}, {-1e-20, 0, 0}, {math.Copysign(0, -1), 0, 0},
	} {
		if got := NormDeg(c.in); got != c.want || math.Signbit(got) {
			t.Errorf("NormDeg(%v) = %v, want %v", c.in, got, c.want)
		}
		if got := NormSignedDeg(c.in); got != c.signed {
			t.Errorf("NormSignedDeg(%v) = %v, want %v", c.in, got, c.signed)
		}
	}
	for _, bad := range []float64{math.NaN(), math.Inf(1), math.Inf(-1)} {
		if got := NormDeg(bad); !math.IsNaN(got) {
			t.Errorf("NormDeg(%v) = %v, want NaN", bad, got)
		}
	}
}

func TestNormDegRange(t *testing.T) {
	rapid.Check(t, func(t *rapid.T) {
		deg := rapid.Float64().Draw(t, "deg")
		if n := NormDeg(deg); !(n >= 0 && n < 360) {
			t.Fatalf("NormDeg(%v) = %v", deg, n)
		}
		if n := NormSignedDeg(deg); !(n > -180 && n <= 180) {
			t.Fatalf("NormSignedDeg(%v) = %v", deg, n)
		}
	})
}

// TestTrueMagneticRelative: variation east is positive, and east makes the
// compass least.
func TestTrueMagneticRelative(t *testing.T) {
	for _, c := range []struct {
		dir       TrueDeg
		variation VariationDeg
		magnetic  MagneticDeg
		heading   TrueDeg
		relative  RelativeDeg
	}{
		{90, 10, 80, 0, 90},
		{5, 10, 355, 350, 15},
		{355, -10, 5, 5, -10},
		{270, 0, 270, 90, 180},
		{0, -3, 3, 0, 0},
	} {
		if got := c.dir.Magnetic(c.variation); got != c.magnetic {
			t.Errorf("%v true, variation %v: %v magnetic, want %v", c.dir, c.variation, got, c.magnetic)
		}
		if got := c.magnetic.True(c.variation); got != c.dir {
			t.Errorf("%v magnetic, variation %v: %v true, want %v", c.magnetic, c.variation, got, c.dir)
		}
		if got := c.dir.RelativeTo(c.heading); got != c.relative {
			t.Errorf("%v from a heading of %v: %v, want %v", c.dir, c.heading, got, c.relative)
		}
	}
}

func TestDirectionTurns(t *testing.T) {
	if got := TrueDeg(350).Add(20); got != 10 {
		t.Errorf("350 + 20 = %v", got)
	}
	if got := TrueDeg(10).Add(-20); got != 350 {
		t.Errorf("10 - 20 = %v", got)
	}
	if got := TrueDeg(190).Reciprocal(); got != 10 {
		t.Errorf("reciprocal of 190 = %v", got)
	}
	rapid.Check(t, func(t *rapid.T) {
		from := True(rapid.Float64Range(0, 360).Draw(t, "from"))
		to := True(rapid.Float64Range(0, 360).Draw(t, "to"))
		turn := to.Minus(from)
		if !(turn > -180 && turn <= 180) {
			t.Fatalf("turn of %v", turn)
		}
		// Two roundings of numbers up to 720.
		if off := math.Abs(NormSignedDeg(float64(from.Add(turn) - to))); off > 3e-13 {
			t.Fatalf("%v turned by %v is %v, want %v", from, turn, from.Add(turn), to)
		}
	})
}
