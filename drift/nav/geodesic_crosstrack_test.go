package nav

import (
	"math"
	"math/rand/v2"
	"testing"

	"pgregory.net/rapid"
)

// TestCrossTrackReturns goes along a geodesic, turns off at a right angle, and
// expects both distances back.
func TestCrossTrackReturns(t *testing.T) {
	rapid.Check(t, func(t *rapid.T) {
		a := anyPosition(t, "a")
		bearing := True(rapid.Float64Range(0, 360).Draw(t, "bearing"))
		along := rapid.OneOf(rapid.Float64Range(-9e6, 9e6), rapid.Float64Range(-1e4, 1e4)).Draw(t, "along")
		cross := rapid.OneOf(rapid.Float64Range(-9e6, 9e6), rapid.Float64Range(-1e4, 1e4), rapid.Float64Range(-1, 1)).Draw(t, "cross")
		g := LineFrom(a, bearing)
		foot, on := g.At(along)
		p, _ := Direct(foot, on.Add(math.Copysign(90, cross)), math.Abs(cross))
		got := g.Offtrack(p)
		if !(math.Abs(got.CrossM-cross) <= stepM+2*coincideM) {
			t.Fatalf("cross %v m, want %v", got.CrossM, cross)
		}
		// A step of the position moves the foot by the step over the scale; the
		// bearing at the foot is held in degrees, to 6e-14 degree: 1e-15 radian.
		scale := math.Abs(math.Cos(cross / semiMinorM))
		if !(math.Abs(got.AlongM-along) <= (2*stepM)/scale) {
			t.Fatalf("along %v m, want %v", got.AlongM, along)
		}
	})
}

func TestCrossTrackSides(t *testing.T) {
	a := PositionFromDegrees(54, 7)
	for _, c := range []struct {
		name         string
		bearing      TrueDeg
		p            Position
		right, ahead float64
	}{
		{"east of a line north", 0, PositionFromDegrees(54.5, 7.5), 1, 1},
		{"west of a line north", 0, PositionFromDegrees(54.5, 6.5), -1, 1},
		{"east of a line south, behind", 180, PositionFromDegrees(54.5, 7.5), -1, -1},
		{"south of a line east", 90, PositionFromDegrees(53.5, 8), 1, 1},
		{"north of a line west", 270, PositionFromDegrees(54.5, 6), 1, 1},
	} {
		got := CrossTrack(a, c.bearing, c.p)
		if !(got.CrossM*c.right > 10e3) || !(got.AlongM*c.ahead > 10e3) {
			t.Errorf("%s: %+v, want signs %v, %v", c.name, got, c.right, c.ahead)
		}
	}
	if got := CrossTrack(a, 30, a); got != (Offtrack{}) {
		t.Errorf("at the start: %+v, want zeros", got)
	}
	// The equator is a geodesic, the way from it is a meridian: a degree of
	// longitude is a π / 180, the first degree of latitude 110574.388558 m
	// (GeodSolve).
	got := CrossTrack(PositionFromDegrees(0, 179.5), 90, PositionFromDegrees(1, -179.5))
	if !(math.Abs(got.CrossM+110574.388558) < 1e-6) || !(math.Abs(got.AlongM-semiMajorM*math.Pi/180) < 1e-7) {
		t.Errorf("off the equator: %+v", got)
	}
}

// TestCrossTrackAgainstGeodSolve looks for the foot by brute force: GeodSolve
// gives points of the geodesic every 100 km for half the circumference in both
// directions, and around our foot, and the distance to each. None may be
// nearer than what we say; at our foot the distance must be ours and the angle
// a right one.
func TestCrossTrackAgainstGeodSolve(t *testing.T) {
	const cases = 100
	r := rand.New(rand.NewPCG(11, 2013))
	var steps []float64
	for s := -2e7; s <= 2e7; s += 1e5 {
		steps = append(steps, s)
	}
	near := []float64{0, -1000, 1000, -10, 10}
	for range cases {
		a, bearing := anywhere(r), True(360*r.Float64())
		p := anywhere(r)
		if r.IntN(2) == 0 {
			p = beside(r, a, 1e5).b
		}
		o := CrossTrack(a, bearing, p)
		if math.Abs(o.CrossM) > 9.5e6 || math.Abs(o.AlongM) > 1.9e7 {
			continue // see the limits in Offtrack
		}
		at := make([]float64, 0, len(near)+len(steps))
		for _, d := range near {
			at = append(at, o.AlongM+d)
		}
		at = append(at, steps...)
		bruteCrossTrack(t, a, bearing, p, o, at)
	}
}

func bruteCrossTrack(t *testing.T, a Position, bearing TrueDeg, p Position, o Offtrack, at []float64) {
	t.Helper()
	lines := make([]string, len(at))
	for i, s := range at {
		lines[i] = num(s)
	}
	start := []string{"-L", num(a.LatDeg()), num(a.LonDeg()), num(float64(bearing))}
	points := geodSolve(t, lines, start...)
	for i, row := range points {
		lines[i] = numbers(row[0], row[1], p.LatDeg(), p.LonDeg())
	}
	for i, row := range geodSolve(t, lines, "-i") {
		azi, distance := row[0], row[2]
		if i == 0 {
			turn := NormSignedDeg(azi - points[0][2])
			// The positions that GeodSolve prints are off by up to 2e-9 m, and the
			// foot by 1e-7 m over the scale at most.
			scale := math.Cos(o.CrossM / semiMinorM)
			limit := 1e-9 + 1e-7/math.Abs(o.CrossM)
			if !(math.Abs(math.Abs(o.CrossM)-distance) <= 1e-7) || (turn > 0) != (o.CrossM > 0) ||
				!(math.Abs(math.Abs(turn)-90)*math.Pi/180*scale <= limit) {
				t.Errorf("from %v towards %v, %v: %+v: at the foot %.9f m at %.9f degrees", a, bearing, p, o, distance, turn)
			}
		} else if !(distance >= math.Abs(o.CrossM)-1e-7) {
			t.Errorf("from %v towards %v, %v: %+v: only %v m at %v", a, bearing, p, o, distance, at[i])
		}
	}
}
