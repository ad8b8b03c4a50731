package weather

import (
	"errors"
	"math"
	"time"

	"wakeback/drift/nav"
)

// Stream is what a tidal stream atlas gives for one hour at one place.
type Stream struct {
	Set              nav.TrueDeg
	NeapKn, SpringKn float64
}

// Tide is today's range of the tide, and the mean ranges the atlas is for.
type Tide struct{ RangeM, NeapRangeM, SpringRangeM float64 }

// ErrTide refuses ranges that rates cannot be interpolated between.
var ErrTide = errors.New("a tide needs ranges in metres, that of springs larger than that of neaps")

// Velocity is the stream at today's range: the rate goes evenly with the range
// between neaps and springs, and on beyond them (common practice with tidal
// stream atlases). It does not fall below zero.
func (s Stream) Velocity(t Tide) (nav.Velocity, error) {
	if !(t.SpringRangeM > t.NeapRangeM && t.NeapRangeM > 0 && t.RangeM >= 0) || math.IsInf(t.RangeM+t.SpringRangeM, 0) {
		return nav.Velocity{}, ErrTide
	}
	kn := s.NeapKn + (s.SpringKn-s.NeapKn)*(t.RangeM-t.NeapRangeM)/(t.SpringRangeM-t.NeapRangeM)
	return nav.Towards(s.Set, math.Max(kn, 0)), nil
}

// HourlyStreams are the samples of an atlas with a chart for each hour: the
// first is for firstHour hours after high water (negative before it), each
// other for an hour later.
func HourlyStreams(highWater time.Time, firstHour int, streams []Stream, t Tide, name string) ([]Sample, error) {
	samples := make([]Sample, len(streams))
	for i, s := range streams {
		v, err := s.Velocity(t)
		if err != nil {
			return nil, err
		}
		samples[i] = Sample{
			From: highWater.Add(time.Duration(firstHour+i) * time.Hour), Velocity: v,
			Source: Tables, Name: name, Said: highWater,
		}
	}
	return samples, nil
}
