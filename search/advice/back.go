package advice

import (
	"errors"
	"fmt"
	"math"
	"time"

	"wakeback/drift/nav"
	"wakeback/search/incident"
)

// maxTrackGap is the longest gap of a track across which it is interpolated.
// Our choice: in ten seconds a boat at 20 kn goes 100 m, about as far as a
// straight line between two fixes may be trusted for a datum.
const maxTrackGap = 10 * time.Second

// ErrNoTrack is wrapped when neither track nor course and speed say where the
// vessel was.
var ErrNoTrack = errors.New("where the vessel was then is not recorded")

// PlaceAt says where the vessel was at a moment: on the recorded track, else
// carried on from the nearest fix by its course and speed, with the error that
// grows with the time carried.
func PlaceAt(track nav.Track, at time.Time) (incident.Place, error) {
	if f, ok := track.At(at, maxTrackGap).Get(); ok {
		return incident.Place{Position: f.Position, Source: incident.FromTrack, ErrorM: f.ErrorM}, nil
	}
	near, ok := nearest(track, at)
	if !ok {
		return incident.Place{}, fmt.Errorf("place at %s: %w", at.UTC().Format(time.RFC3339), ErrNoTrack)
	}
	carried := at.Sub(near.At)
	f, ok := near.Reckon(carried).Get()
	if !ok {
		return incident.Place{}, fmt.Errorf("place at %s: %w", at.UTC().Format(time.RFC3339), ErrNoTrack)
	}
	return incident.Place{
		Position: f.Position, Source: incident.FromDR, ErrorM: f.ErrorM, FixAgeS: nav.Some(math.Abs(carried.Seconds())),
	}, nil
}

// nearest is the fix closest in time.
func nearest(track nav.Track, at time.Time) (nav.Fix, bool) {
	before, okBefore := track.LastBefore(at).Get()
	after, okAfter := track.FirstAfter(at).Get()
	switch {
	case okBefore && (!okAfter || at.Sub(before.At) <= after.At.Sub(at)):
		return before, true
	case okAfter:
		return after, true
	}
	return nav.Fix{}, false
}

// Back moves a mark back in time along the track: where the vessel was when
// the person fell, if the press came later by the time given. The mark's own
// course and speed serve when no track does.
func Back(track nav.Track, m incident.Mark, fellAt time.Time) (incident.Place, error) {
	place, err := PlaceAt(track, fellAt)
	if err == nil {
		return place, nil
	}
	press, ok := m.Press.Get()
	if !ok {
		return incident.Place{}, err
	}
	alone := nav.NewTrack([]nav.Fix{{
		At: m.At, Position: press.Position, SogKn: m.SogKn, CogTrue: m.CogDeg, ErrorM: press.ErrorM,
	}})
	return PlaceAt(alone, fellAt)
}

// maxPathPoints bounds the path of a person who was not seen to fall.
const maxPathPoints = 500

// Path is the stretch of track between two moments, thinned to at most 500
// points, with its ends.
func Path(track nav.Track, from, to time.Time) []incident.PathPoint {
	fixes := track.Between(from, to)
	step := max(1, (len(fixes)+maxPathPoints-1)/maxPathPoints)
	var path []incident.PathPoint
	for i := 0; i < len(fixes); i += step {
		path = append(path, incident.PathPoint{At: fixes[i].At, Position: fixes[i].Position})
	}
	if n := len(fixes); n > 0 && (n-1)%step != 0 {
		path = append(path, incident.PathPoint{At: fixes[n-1].At, Position: fixes[n-1].Position})
	}
	return path
}
