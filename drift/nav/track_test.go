package nav

import (
	"math"
	"reflect"
	"slices"
	"testing"
	"time"

	"pgregory.net/rapid"
)

var noon = time.Date(2026, 6, 1, 12, 0, 0, 0, time.UTC)

func fixAt(second int, lat, lon float64) Fix {
	return Fix{At: noon.Add(time.Duration(second) * time.Second), Position: PositionFromDegrees(lat, lon)}
}

func seconds(fixes []Fix) []int {
	var s []int
	for _, f := range fixes {
		s = append(s, int(f.At.Sub(noon)/time.Second))
	}
	return s
}

func TestFixVelocity(t *testing.T) {
	for _, c := range []struct {
		name string
		sog  Opt[float64]
		cog  Opt[TrueDeg]
		want Opt[Velocity]
	}{
		{"nothing known", None[float64](), None[TrueDeg](), None[Velocity]()},
		{"only the course", None[float64](), Some(TrueDeg(90)), None[Velocity]()},
		{"only the speed", Some(5.0), None[TrueDeg](), None[Velocity]()},
		{"stopped, course or not", Some(0.0), None[TrueDeg](), Some(Velocity{})},
		{"both", Some(5.0), Some(TrueDeg(90)), Some(Velocity{EastMs: 5 * MsPerKn})},
	} {
		if got := (Fix{SogKn: c.sog, CogTrue: c.cog}).Velocity(); got != c.want {
			t.Errorf("%s: %+v, want %+v", c.name, got, c.want)
		}
	}
}

// TestTrackAnyOrder adds fixes in any order, one by one and at once: the track
// is in order of time, with the last given of each instant.
func TestTrackAnyOrder(t *testing.T) {
	rapid.Check(t, func(t *rapid.T) {
		at := rapid.SliceOfN(rapid.IntRange(0, 20), 0, 40).Draw(t, "at")
		want := map[int]float64{}
		var fixes []Fix
		var one Track
		for i, s := range at {
			lat := float64(i)
			want[s] = lat
			fixes = append(fixes, fixAt(s, lat, 0))
			one.Add(fixes[i])
		}
		given := slices.Clone(fixes)
		all := NewTrack(fixes)
		if !reflect.DeepEqual(given, fixes) {
			t.Fatal("NewTrack changed the slice it was given")
		}
		if !slices.Equal(one.Fixes(), all.Fixes()) || all.Len() != len(want) {
			t.Fatalf("one by one %v, at once %v", one.Fixes(), all.Fixes())
		}
		got := seconds(all.Fixes())
		if !slices.IsSorted(got) {
			t.Fatalf("out of order: %v", got)
		}
		for i, s := range got {
			if lat := all.Fixes()[i].Position.LatDeg(); math.Abs(lat-want[s]) > 1e-13 {
				t.Fatalf("at %d s: %v, want %v", s, lat, want[s])
			}
		}
	})
}

// TestTrackSnapshot does everything to a track, and expects its copy to stay.
func TestTrackSnapshot(t *testing.T) {
	track := NewTrack([]Fix{fixAt(0, 1, 0), fixAt(10, 2, 0), fixAt(20, 3, 0)})
	track.Add(fixAt(30, 4, 0))
	copied := track
	before := copied.Fixes()
	track.Add(fixAt(40, 5, 0))
	track.Add(fixAt(5, 6, 0))
	track.Add(fixAt(10, 7, 0))
	track.Trim(noon.Add(15 * time.Second))
	if !slices.Equal(copied.Fixes(), before) {
		t.Errorf("the copy became %v, was %v", seconds(copied.Fixes()), seconds(before))
	}
	if got := seconds(track.Fixes()); !slices.Equal(got, []int{20, 30, 40}) {
		t.Errorf("the track is %v", got)
	}
}

func TestTrackLookups(t *testing.T) {
	track := NewTrack([]Fix{fixAt(0, 1, 0), fixAt(10, 2, 0), fixAt(20, 3, 0)})
	at := func(s float64) time.Time { return noon.Add(time.Duration(s * float64(time.Second))) }
	for _, c := range []struct {
		from, to float64
		want     []int
	}{
		{0, 20, []int{0, 10, 20}}, {0, 0, []int{0}}, {1, 9, nil}, {5, 15, []int{10}}, {-5, 5, []int{0}}, {20, 0, nil}, {21, 30, nil},
	} {
		if got := seconds(track.Between(at(c.from), at(c.to))); !slices.Equal(got, c.want) {
			t.Errorf("between %v and %v s: %v, want %v", c.from, c.to, got, c.want)
		}
	}
	for _, c := range []struct {
		at   float64
		want int
	}{{-1, -1}, {0, 0}, {9.9, 0}, {10, 10}, {99, 20}} {
		got := -1
		if f, ok := track.LastBefore(at(c.at)).Get(); ok {
			got = seconds([]Fix{f})[0]
		}
		if got != c.want {
			t.Errorf("last before %v s: %d, want %d", c.at, got, c.want)
		}
	}
	if f, ok := track.Last().Get(); !ok || seconds([]Fix{f})[0] != 20 {
		t.Errorf("last: %v, %t", f, ok)
	}
	var empty Track
	if empty.Last().IsSet() || empty.LastBefore(noon).IsSet() || empty.At(noon, time.Hour).IsSet() || empty.Between(noon, noon) != nil || empty.Len() != 0 {
		t.Error("an empty track has fixes")
	}
	empty.Trim(noon)
}

func TestTrackAt(t *testing.T) {
	track := NewTrack([]Fix{fixAt(0, 54, 7), fixAt(10, 54.001, 7), fixAt(100, 54.002, 7)})
	for _, c := range []struct {
		name string
		at   time.Duration
		gap  time.Duration
		lat  float64 // NaN: absent
	}{
		{"before the first", -time.Second, time.Hour, math.NaN()},
		{"on the first", 0, 0, 54},
		{"half way", 5 * time.Second, 10 * time.Second, 54.0005},
		{"a tenth of the way", time.Second, 10 * time.Second, 54.0001},
		{"between seconds", 2500 * time.Millisecond, 10 * time.Second, 54.00025},
		{"across too long a gap", 50 * time.Second, 60 * time.Second, math.NaN()},
		{"across a gap allowed", 55 * time.Second, 90 * time.Second, 54.0015},
		{"on a fix at a gap", 10 * time.Second, time.Second, 54.001},
		{"on the last", 100 * time.Second, time.Second, 54.002},
		{"after the last", 101 * time.Second, time.Hour, math.NaN()},
	} {
		f, ok := track.At(noon.Add(c.at), c.gap).Get()
		if ok == math.IsNaN(c.lat) {
			t.Errorf("%s: present %t", c.name, ok)
			continue
		}
		// Along a meridian equal steps of latitude are equal in metres but for
		// the change of curvature, which over 0.001 degree is below 1e-9 degree.
		if ok && (math.Abs(f.Position.LatDeg()-c.lat) > 1e-9 || !f.At.Equal(noon.Add(c.at))) {
			t.Errorf("%s: latitude %.9f at %v, want %v", c.name, f.Position.LatDeg(), f.At, c.lat)
		}
	}
}

// TestTrackAtIsOnTheWay: what is interpolated lies between the two fixes, in
// proportion to the time, wherever on Earth they are.
func TestTrackAtIsOnTheWay(t *testing.T) {
	rapid.Check(t, func(t *rapid.T) {
		a := anyPosition(t, "a")
		b, _ := Direct(a, True(rapid.Float64Range(0, 360).Draw(t, "course")), rapid.Float64Range(0.1, 1e5).Draw(t, "rangeM"))
		whole := Inverse(a, b).RangeM
		part := rapid.IntRange(0, 1000).Draw(t, "thousandths")
		track := NewTrack([]Fix{{At: noon, Position: a}, {At: noon.Add(time.Second), Position: b}})
		f, ok := track.At(noon.Add(time.Duration(part)*time.Millisecond), time.Second).Get()
		if !ok {
			t.Fatal("no fix between two")
		}
		done, left := Inverse(a, f.Position).RangeM, Inverse(f.Position, b).RangeM
		if want := whole * float64(part) / 1000; !(math.Abs(done-want) <= 2*stepM) || !(math.Abs(done+left-whole) <= 2*stepM) {
			t.Fatalf("%v of %v m done, %v left, want %v done", done, whole, left, want)
		}
	})
}

// TestTrackAtKeeps tells what an interpolated fix has beside its position.
func TestTrackAtKeeps(t *testing.T) {
	a, b := fixAt(0, 54, 7), fixAt(10, 54.001, 7)
	a.SogKn, a.CogTrue = Some(6.0), Some(TrueDeg(10))
	b.SogKn, b.CogTrue = Some(7.0), Some(TrueDeg(20))
	for _, c := range []struct{ a, b, want Opt[float64] }{
		{None[float64](), None[float64](), None[float64]()},
		{Some(5.0), None[float64](), Some(5.0)},
		{None[float64](), Some(8.0), Some(8.0)},
		{Some(5.0), Some(8.0), Some(8.0)},
		{Some(9.0), Some(8.0), Some(9.0)},
	} {
		a.ErrorM, b.ErrorM = c.a, c.b
		f, ok := NewTrack([]Fix{a, b}).At(noon.Add(9*time.Second), time.Minute).Get()
		if !ok || f.ErrorM != c.want || f.SogKn != a.SogKn || f.CogTrue != a.CogTrue {
			t.Errorf("errors %+v and %+v: %+v, want an error of %+v and the speed of the earlier", c.a, c.b, f, c.want)
		}
	}
}
