package weather

import (
	"math"

	"wakeback/drift/nav"
)

// The wind-driven current of the surface: 3 % of the wind at 10 m, about 10
// degrees to the right of it in the north and to the left in the south (AMS
// Glossary of Meteorology, "Wind drift").
const (
	windDrivenShare   = 0.03
	windDrivenTurnDeg = 10
)

// WindDriven is the wind-driven current at a latitude, with the standard
// deviation of each component. It is for the open sea, deep, with a steady
// wind of hours; in tidal narrows it is to be left out. Sources put the share
// at 2.5 to 3 % and the angle at 10 to 45 degrees, so the error is half of the
// speed (our choice: what 35 degrees of doubt come to), on top of that of a
// current nobody observed.
//
// It is never added to a current that was measured: that holds it already. It
// may be added to a tidal stream from tables.
func WindDriven(wind nav.Velocity, latDeg float64) (nav.Velocity, float64) {
	turn := 0.0
	switch {
	case latDeg > 0:
		turn = windDrivenTurnDeg
	case latDeg < 0:
		turn = -windDrivenTurnDeg
	}
	v := wind.Scale(windDrivenShare).Rotate(turn)
	return v, math.Hypot(v.SpeedMs()/2, ModelCurrentSDMs)
}

// ekmanFactor: V0 = 0.0127 W / sqrt(sin|lat|) (Ekman 1905; from memory).
const ekmanFactor = 0.0127

// Ekman is the surface current of the ideal deep ocean, 45 degrees to the right
// of the wind in the north, to the left in the south: the other end of what
// sources say. It is absent within 10 degrees of the equator, where the
// formula grows without bound (our choice of where).
func Ekman(wind nav.Velocity, latDeg float64) nav.Opt[nav.Velocity] {
	if !(math.Abs(latDeg) >= 10 && math.Abs(latDeg) <= 90) {
		return nav.None[nav.Velocity]()
	}
	share := ekmanFactor / math.Sqrt(math.Sin(math.Abs(latDeg)*math.Pi/180))
	return nav.Some(wind.Scale(share).Rotate(math.Copysign(45, latDeg)))
}
