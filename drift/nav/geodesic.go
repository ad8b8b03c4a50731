package nav

import (
	"math"

	"github.com/golang/geo/s2"
)

// Line is the shortest line between two positions.
type Line struct {
	RangeM       float64
	Bearing      Opt[TrueDeg] // at the start, towards the end; absent when the two coincide
	FinalBearing Opt[TrueDeg] // at the end, going on
}

// Inverse solves the inverse problem: range and bearings from a to b.
func Inverse(a, b Position) Line {
	d := s2.LatLng(a).Distance(s2.LatLng(b)).Radians() * 6371008.8
	if d == 0 {
		return Line{}
	}
	return Line{RangeM: d, Bearing: Some(sphericalBearing(a, b)), FinalBearing: Some(sphericalBearing(b, a).Reciprocal())}
}

func sphericalBearing(a, b Position) TrueDeg {
	dl := (b.Lng - a.Lng).Radians()
	sa, ca := math.Sincos(a.Lat.Radians())
	sb, cb := math.Sincos(b.Lat.Radians())
	return True(math.Atan2(math.Sin(dl)*cb, ca*sb-sa*cb*math.Cos(dl)) * 180 / math.Pi)
}

// Direct solves the direct problem: the position reached by going rangeM
// metres from a on the geodesic that starts towards bearing, and the bearing
// there.
func Direct(a Position, bearing TrueDeg, rangeM float64) (Position, TrueDeg) {
	s, c := sinCosDeg(float64(bearing))
	sd, cd := math.Sincos(rangeM / 6371008.8)
	sa, ca := math.Sincos(a.Lat.Radians())
	lat := math.Asin(sa*cd + ca*sd*c)
	lon := a.Lng.Radians() + math.Atan2(s*sd*ca, cd-sa*math.Sin(lat))
	p := PositionFromDegrees(lat*180/math.Pi, lon*180/math.Pi)
	return p, sphericalBearing(p, a).Reciprocal()
}

// Offtrack says where a point lies from a line.
type Offtrack struct {
	CrossM float64 // shortest distance from the line, positive to the right of it
	AlongM float64 // from the line's start to the foot of that distance
}

// CrossTrack measures p against the geodesic that leaves a towards bearing.
func CrossTrack(a Position, bearing TrueDeg, p Position) Offtrack {
	l := Inverse(a, p)
	b, ok := l.Bearing.Get()
	if !ok {
		return Offtrack{}
	}
	s, c := sinCosDeg(b.Minus(bearing))
	return Offtrack{CrossM: l.RangeM * s, AlongM: l.RangeM * c}
}
