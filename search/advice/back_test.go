package advice

import (
	"errors"
	"testing"
	"time"

	"wakeback/drift/nav"
	"wakeback/search/incident"
)

// steam makes a track of one fix a second from start, turning by rate degrees
// a second after turnAt seconds.
func steam(start nav.Position, kn float64, course nav.TrueDeg, seconds, turnAt int, rate float64) nav.Track {
	var track nav.Track
	p := start
	for i := range seconds + 1 {
		if i > 0 {
			if i > turnAt {
				course = course.Add(rate)
			}
			p = p.Shift(nav.Along(course, kn*nav.MsPerKn))
		}
		track.Add(nav.Fix{At: t0.Add(time.Duration(i) * time.Second), Position: p, SogKn: nav.Some(kn), CogTrue: nav.Some(course)})
	}
	return track
}

// 8 kn, steady 000, pressed 25 s after the fall: the datum moves back 103 m
// along the track.
func TestScenario03LatePress(t *testing.T) {
	start := nav.PositionFromDegrees(54.1, 7.9)
	track := steam(start, 8, 0, 60, 1000, 0)
	last, _ := track.Last().Get()
	m := incident.Mark{Said: incident.Said{At: last.At}}
	place, err := Back(track, m, m.At.Add(-25*time.Second))
	if err != nil {
		t.Fatal(err)
	}
	line := nav.Inverse(last.Position, place.Position)
	near(t, "moved back", line.RangeM, 103, 1)
	near(t, "towards", float64(line.Bearing.Or(0)), 180, 0.1)
	if place.Source != incident.FromTrack {
		t.Errorf("source = %s", place.Source)
	}
}

// As before, but with a turn of 90 degrees 10 s before the press: the shift
// follows the curve and not the present heading.
func TestScenario04LatePressAfterATurn(t *testing.T) {
	start := nav.PositionFromDegrees(54.1, 7.9)
	track := steam(start, 8, 0, 60, 50, 9)
	last, _ := track.Last().Get()
	m := incident.Mark{Said: incident.Said{At: last.At}}
	place, err := Back(track, m, m.At.Add(-25*time.Second))
	if err != nil {
		t.Fatal(err)
	}
	// 35 s from the start on 000 at 8 kn, before any turn.
	want := start.Shift(nav.Along(0, 35*8*nav.MsPerKn))
	near(t, "off the place on the track", nav.Inverse(want, place.Position).RangeM, 0, 1)
	straight := last.Position.Shift(nav.Along(last.CogTrue.Or(0).Reciprocal(), 103))
	if d := nav.Inverse(straight, place.Position).RangeM; d < 30 {
		t.Errorf("only %v m from a straight shift on the present heading", d)
	}
}

// The last fix was 95 s old at 6.5 kn: the position is reckoned 318 m on, with
// an error that grows.
func TestScenario08ReckonedPosition(t *testing.T) {
	start := nav.PositionFromDegrees(54.1, 7.9)
	track := steam(start, 6.5, 30, 10, 1000, 0)
	last, _ := track.Last().Get()
	place, err := PlaceAt(track, last.At.Add(95*time.Second))
	if err != nil {
		t.Fatal(err)
	}
	line := nav.Inverse(last.Position, place.Position)
	near(t, "carried on", line.RangeM, 318, 1)
	near(t, "towards", float64(line.Bearing.Or(0)), 30, 0.1)
	if place.Source != incident.FromDR {
		t.Errorf("source = %s", place.Source)
	}
	later, err := PlaceAt(track, last.At.Add(190*time.Second))
	if err != nil {
		t.Fatal(err)
	}
	near(t, "error grows with the run", later.ErrorM.Or(0)/place.ErrorM.Or(1), 2, 1e-6)
}

func TestPlaceWithoutTrack(t *testing.T) {
	if _, err := PlaceAt(nav.Track{}, t0); !errors.Is(err, ErrNoTrack) {
		t.Errorf("err = %v, want ErrNoTrack", err)
	}
	still := nav.NewTrack([]nav.Fix{{At: t0, Position: nav.PositionFromDegrees(54, 7)}})
	if _, err := PlaceAt(still, t0.Add(time.Hour)); !errors.Is(err, ErrNoTrack) {
		t.Errorf("a fix without speed was carried on: %v", err)
	}
}

func TestPathIsThinnedAndKeepsItsEnds(t *testing.T) {
	track := steam(nav.PositionFromDegrees(54.1, 7.9), 6, 270, 4*3600, 1<<30, 0)
	from, to := t0.Add(time.Hour), t0.Add(3*time.Hour+7*time.Second)
	path := Path(track, from, to)
	if len(path) > maxPathPoints+1 || !path[0].At.Equal(from) || !path[len(path)-1].At.Equal(to) {
		t.Fatalf("%d points from %v to %v", len(path), path[0].At, path[len(path)-1].At)
	}
	var run float64
	for i := range path[1:] {
		run += nav.Inverse(path[i].Position, path[i+1].Position).RangeM
	}
	near(t, "length", run, to.Sub(from).Seconds()*6*nav.MsPerKn, 5)
	if Path(track, to, from) != nil {
		t.Errorf("a path backwards in time")
	}
}
