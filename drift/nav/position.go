package nav

import (
	"encoding/json"
	"errors"
	"fmt"
	"math"

	"github.com/golang/geo/s1"
)

// Position is a point on the WGS 84 ellipsoid: geodetic latitude, north
// positive, and longitude, east positive. It has the shape of s2.LatLng and
// converts to it, but not its methods, which measure on a sphere; and not the
// package, which would make the engine on the phones a tenth larger.
type Position struct {
	Lat, Lng s1.Angle
}

// PositionFromDegrees makes a position from degrees; the longitude is brought
// into [-180, 180). It does not check the latitude: see [Position.Validate].
func PositionFromDegrees(latDeg, lonDeg float64) Position {
	lng := degrees(normLonDeg(lonDeg))
	if lng >= math.Pi { // a hair less than 180 degrees may round up to it
		lng = -math.Pi
	}
	return Position{Lat: degrees(latDeg), Lng: lng}
}

func degrees(d float64) s1.Angle { return s1.Angle(d * (math.Pi / 180)) }

func normLonDeg(d float64) float64 {
	if d >= -180 && d < 180 {
		return d
	}
	d = NormSignedDeg(d)
	if d == 180 {
		return -180
	}
	return d
}

// LatDeg is the latitude in degrees.
func (p Position) LatDeg() float64 { return p.Lat.Degrees() }

// LonDeg is the longitude in degrees.
func (p Position) LonDeg() float64 { return p.Lng.Degrees() }

// ErrPosition is wrapped by every error about a position that is not one.
var ErrPosition = errors.New("not a position")

// Validate returns an error, wrapping [ErrPosition], when a coordinate is not
// a finite number, the latitude is beyond 90 or the longitude beyond 180
// degrees.
func (p Position) Validate() error { return validateDegrees(p.LatDeg(), p.LonDeg()) }

func validateDegrees(latDeg, lonDeg float64) error {
	// 1e-9 degree (0.1 mm) lets a value through that only rounding took past the limit.
	const slack = 1e-9
	switch {
	case math.IsNaN(latDeg) || math.IsInf(latDeg, 0) || math.Abs(latDeg) > 90+slack:
		return fmt.Errorf("%w: latitude %v, expected -90 to 90 degrees", ErrPosition, latDeg)
	case math.IsNaN(lonDeg) || math.IsInf(lonDeg, 0) || math.Abs(lonDeg) > 180+slack:
		return fmt.Errorf("%w: longitude %v, expected -180 to 180 degrees", ErrPosition, lonDeg)
	}
	return nil
}

// wirePosition is the form on the wire. Pointers tell absent from zero.
type wirePosition struct {
	Lat *float64 `json:"lat"`
	Lon *float64 `json:"lon"`
}

// MarshalJSON writes {"lat": ..., "lon": ...} in degrees, rounded to 1e-7, the
// longitude in [-180, 180).
func (p Position) MarshalJSON() ([]byte, error) {
	if err := p.Validate(); err != nil {
		return nil, err
	}
	lat, lon := RoundE7(p.LatDeg()), normLonDeg(RoundE7(p.LonDeg()))
	return json.Marshal(wirePosition{&lat, &lon})
}

// UnmarshalJSON reads {"lat": ..., "lon": ...}; both are required and checked.
func (p *Position) UnmarshalJSON(data []byte) error {
	var w wirePosition
	if err := json.Unmarshal(data, &w); err != nil {
		return fmt.Errorf(`%w: expected {"lat": degrees, "lon": degrees}: %v`, ErrPosition, err)
	}
	if w.Lat == nil || w.Lon == nil {
		return fmt.Errorf(`%w: expected {"lat": degrees, "lon": degrees}, one is missing`, ErrPosition)
	}
	if err := validateDegrees(*w.Lat, *w.Lon); err != nil {
		return err
	}
	*p = PositionFromDegrees(*w.Lat, *w.Lon)
	return nil
}

// RoundE7 rounds degrees to 1e-7, the step in which positions are stored. Zero
// has no sign, so that equal positions are equal in writing.
func RoundE7(deg float64) float64 { return math.Round(deg*1e7)/1e7 + 0 }
