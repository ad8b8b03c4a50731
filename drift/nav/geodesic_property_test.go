package nav

import (
	"math"
	"testing"

	"pgregory.net/rapid"
)

// anyPosition draws positions of every sort: anywhere, at and near the poles,
// the equator and the antimeridian.
func anyPosition(t *rapid.T, label string) Position {
	lat := rapid.OneOf(
		rapid.Float64Range(-90, 90),
		rapid.Float64Range(89.999, 90),
		rapid.Float64Range(-90, -89.999),
		rapid.Float64Range(-1e-6, 1e-6),
		rapid.SampledFrom([]float64{-90, 0, 90}),
	).Draw(t, label+" lat")
	lon := rapid.OneOf(
		rapid.Float64Range(-180, 180),
		rapid.Float64Range(179.999, 180),
		rapid.SampledFrom([]float64{-180, -90, 0, 90}),
	).Draw(t, label+" lon")
	return PositionFromDegrees(lat, lon)
}

// stepM is what positions held in steps do to a range: up to 1e-9 m in either
// coordinate of either end, and as much for the rounding of the method itself.
const stepM = 2e-8

// minHalfM is shorter than any shortest line can be and not be unique: the cut
// begins at π b, 19,970,326 m, on the equator and nowhere sooner.
const minHalfM = 19_900_000

func TestDirectThenInverse(t *testing.T) {
	rapid.Check(t, func(t *rapid.T) {
		a := anyPosition(t, "a")
		bearing := True(rapid.Float64Range(0, 360).Draw(t, "bearing"))
		rangeM := rapid.OneOf(rapid.Float64Range(0, minHalfM), rapid.Float64Range(0, 1000), rapid.Float64Range(0, 1)).Draw(t, "rangeM")
		b, last := Direct(a, bearing, rangeM)
		line := Inverse(a, b)
		if !(math.Abs(line.RangeM-rangeM) <= stepM) {
			t.Fatalf("went %v m, came back with %v", rangeM, line.RangeM)
		}
		if rangeM < 0.1 {
			return // the steps of the positions turn so short a line
		}
		limit := 1e-9 + stepM/math.Abs(solveInverse(a, b).reducedM)
		if got, _ := line.Bearing.Get(); !(math.Abs(got.Minus(bearing))*math.Pi/180 <= limit) {
			t.Fatalf("set out towards %v, came back with %v", bearing, got)
		}
		if got, _ := line.FinalBearing.Get(); !(math.Abs(got.Minus(last))*math.Pi/180 <= limit+nearPole(b)) {
			t.Fatalf("arrived towards %v, came back with %v", last, got)
		}
	})
}

// nearPole is how far rounding may turn the north of a position close to a
// pole: by a step over the distance to it.
func nearPole(p Position) float64 {
	return min(2*math.Pi, 4e-9/((quarterTurn-math.Abs(float64(p.Lat)))*semiMajorM))
}

func TestInverseSymmetric(t *testing.T) {
	rapid.Check(t, func(t *rapid.T) {
		a, b := anyPosition(t, "a"), anyPosition(t, "b")
		there, back := Inverse(a, b), Inverse(b, a)
		if !(math.Abs(there.RangeM-back.RangeM) <= stepM) {
			t.Fatalf("there %v m, back %v m", there.RangeM, back.RangeM)
		}
		// Where two lines are equally short, there and back may differ.
		if there.RangeM < 1e-3 || there.RangeM > minHalfM {
			return
		}
		for i, v := range [][2]Opt[TrueDeg]{{there.Bearing, back.FinalBearing}, {there.FinalBearing, back.Bearing}} {
			p, _ := v[0].Get()
			q, _ := v[1].Get()
			// The arrangement makes one problem of both; only signs differ.
			if !(math.Abs(p.Minus(q.Reciprocal())) <= 1e-12) {
				t.Fatalf("bearing %d: there %v, back %v", i, p, q)
			}
		}
	})
}

// TestInverseAnyMeridian turns the globe: no meridian is special.
func TestInverseAnyMeridian(t *testing.T) {
	rapid.Check(t, func(t *rapid.T) {
		a, b := anyPosition(t, "a"), anyPosition(t, "b")
		turn := rapid.Float64Range(-360, 360).Draw(t, "turn")
		line := Inverse(a, b)
		turned := Inverse(PositionFromDegrees(a.LatDeg(), a.LonDeg()+turn), PositionFromDegrees(b.LatDeg(), b.LonDeg()+turn))
		// Adding degrees rounds each longitude by up to 6e-14 degree, 6e-9 m.
		if !(math.Abs(line.RangeM-turned.RangeM) <= 2*stepM) {
			t.Fatalf("range %v, turned %v", line.RangeM, turned.RangeM)
		}
	})
}

func TestInverseTriangle(t *testing.T) {
	rapid.Check(t, func(t *rapid.T) {
		a, b, c := anyPosition(t, "a"), anyPosition(t, "b"), anyPosition(t, "c")
		direct, round := Inverse(a, c).RangeM, Inverse(a, b).RangeM+Inverse(b, c).RangeM
		if !(direct <= round+2*stepM) {
			t.Fatalf("a to c %v m, by way of b %v m", direct, round)
		}
	})
}

// TestGeodesicGoesOn goes in two steps what was gone in one, and backwards.
func TestGeodesicGoesOn(t *testing.T) {
	rapid.Check(t, func(t *rapid.T) {
		a := anyPosition(t, "a")
		bearing := True(rapid.Float64Range(0, 360).Draw(t, "bearing"))
		first := rapid.Float64Range(-3e7, 3e7).Draw(t, "first")
		second := rapid.Float64Range(-3e7, 3e7).Draw(t, "second")
		g := LineFrom(a, bearing)
		whole, _ := g.At(first + second)
		mid, on := g.At(first)
		parts, _ := Direct(mid, on, second)
		// The bearing in degrees is held in steps of 6e-14 degree: 1e-15 rad,
		// which over the Earth's radius is 6e-9 m; the rest is steps of position.
		if apart := apartM(whole, parts); !(apart <= 2*stepM) {
			t.Fatalf("two steps end %v m from where one does", apart)
		}
		if start, _ := g.At(0); !(apartM(start, a) <= stepM) {
			t.Fatalf("range 0 ends at %v, started at %v", start, a)
		}
	})
}

func FuzzGeodesic(f *testing.F) {
	f.Add(54.1, 7.9, 54.2, 8.0, 30.0, 1000.0)
	f.Add(90.0, 0.0, -90.0, 180.0, 0.0, 2e7)
	f.Add(0.0, 0.0, 0.0, 179.5, 90.0, -4e7)
	f.Add(0.0, -180.0, 1e-300, 180.0, 359.999, 1e-300)
	f.Add(-30.0, 0.0, 30.0, 180.0, 720.0, 1e300)
	f.Add(math.NaN(), 0.0, 0.0, 0.0, 0.0, 0.0)
	f.Add(0.0, math.Inf(1), 91.0, 1e308, math.Inf(-1), math.Inf(1))
	f.Fuzz(func(t *testing.T, lat1, lon1, lat2, lon2, bearing, rangeM float64) {
		a, b := PositionFromDegrees(lat1, lon1), PositionFromDegrees(lat2, lon2)
		validA, validB := a.Validate() == nil, b.Validate() == nil
		line := Inverse(a, b)
		p, last := Direct(a, TrueDeg(bearing), rangeM)
		o := CrossTrack(a, TrueDeg(bearing), b)
		// The longest of all shortest lines is the meridian from pole to pole.
		if inRange := line.RangeM >= 0 && line.RangeM <= 20003931.4587; inRange != (validA && validB) {
			t.Errorf("Inverse(%v, %v) = %+v", a, b, line)
		}
		for _, opt := range []Opt[TrueDeg]{line.Bearing, line.FinalBearing} {
			if d, ok := opt.Get(); ok != (line.RangeM > 0) || ok && !(d >= 0 && d < 360) {
				t.Errorf("Inverse(%v, %v) = %+v", a, b, line)
			}
		}
		goes := validA && finite(bearing) && finite(rangeM)
		if arrives := p.Validate() == nil && last >= 0 && last < 360; arrives != goes {
			t.Errorf("Direct(%v, %v, %v) = %v, %v", a, bearing, rangeM, p, last)
		}
		if measured := finite(o.CrossM) && finite(o.AlongM); measured != (validA && validB && finite(bearing)) {
			t.Errorf("CrossTrack(%v, %v, %v) = %+v", a, bearing, b, o)
		}
		if math.Abs(o.CrossM) > 20003931.4587 {
			t.Errorf("CrossTrack(%v, %v, %v) = %+v", a, bearing, b, o)
		}
	})
}
