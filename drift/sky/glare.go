package sky

import (
	"math"

	"wakeback/drift/nav"
)

// Sector is the bearings within HalfDeg of Centre, either side.
type Sector struct {
	Centre  nav.TrueDeg
	HalfDeg float64
}

// Contains reports whether a bearing lies in the sector.
func (s Sector) Contains(bearing nav.TrueDeg) bool {
	return math.Abs(bearing.Minus(s.Centre)) <= s.HalfDeg
}

// GlareHalfDeg is the half angle of the sector in which the sun and its
// reflections hide a head in the water. Our choice, because in 20 knots of
// wind facets twice as steep as the usual slope of the sea (Cox and Munk 1954,
// J. Opt. Soc. Am. 44, 838: mean square slope 0.003 + 0.00512 W, W in m/s,
// from memory) reflect a sun up to 45 degrees high towards a low eye from
// within 13 degrees of its bearing; the rest is for the sun itself and the yaw
// of the vessel.
const GlareHalfDeg = 20

// glareHighestDeg is the sun's altitude above which no sector is given. Our
// choice, because from about 50 degrees on, facets that steep no longer send
// its light to a low eye from the water where a lookout searches, and a hand
// or a peak shades the eyes from the sun itself.
const glareHighestDeg = 45

// Glare is the sector around the sun in which looking is hard: absent with the
// sun down or more than 45 degrees high. Cloud is not known here.
func (s SunPosition) Glare() nav.Opt[Sector] {
	if !(s.AltitudeDeg >= horizonDeg && s.AltitudeDeg <= glareHighestDeg) {
		return nav.None[Sector]()
	}
	return nav.Some(Sector{Centre: s.AzimuthTrue, HalfDeg: GlareHalfDeg})
}
