package nav

// Plane is a local flat map: the azimuthal equidistant projection of the
// ellipsoid around its origin. Range and bearing from the origin are exact;
// between two other points the scale is off by about (r/R)²/6 at range r on
// an Earth of radius R: 0.04 m a kilometre at 100 km, 0.4 mm at 10 km.
type Plane struct {
	origin Position
}

// NewPlane makes a plane around origin. At a pole, where every direction from
// it is south or north, east and north are those of the origin's longitude.
func NewPlane(origin Position) Plane { return Plane{origin: origin} }

// Origin is the point with zero offset.
func (pl Plane) Origin() Position { return pl.origin }

// Offset returns where p lies from the origin; NaN if either is no position.
func (pl Plane) Offset(p Position) Offset {
	line := Inverse(pl.origin, p)
	if line.RangeM == 0 {
		return Offset{}
	}
	return Along(line.Bearing.Or(TrueDeg(nan)), line.RangeM)
}

// Position returns the point that lies off the origin by o; NaN if o is not
// finite or the origin no position.
func (pl Plane) Position(o Offset) Position {
	rangeM := o.RangeM()
	if rangeM == 0 {
		return pl.origin
	}
	p, _ := Direct(pl.origin, o.Direction().Or(TrueDeg(nan)), rangeM)
	return p
}

// Shift moves p by an offset in its own local plane.
func (p Position) Shift(o Offset) Position { return NewPlane(p).Position(o) }
