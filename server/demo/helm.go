package demo

import (
	"math"

	"wakeback/drift/nav"
)

// helm is what the vessel is told to do.
type helm struct {
	course  nav.Opt[nav.TrueDeg] // a heading to steer; absent when the rudder is held
	rudder  float64              // held, -1 to 1
	speedKn float64
}

// order is the rudder that a helmsman lays to come to the course: more the
// further off, less the faster she comes round already.
func (h helm) order(v hull) float64 {
	course, ok := h.course.Get()
	if !ok {
		return h.rudder
	}
	const meetS = 2.5 // looks ahead as long as she takes to answer
	off := course.Minus(v.heading()) - (v.yawDegS+v.wave)*meetS
	return clamp(off/25, 1)
}

// inside reports whether a place lies inside the circle that she would turn
// towards it: whoever turns now goes round it for ever.
func inside(v hull, to nav.Offset) bool {
	const margin = 1.15 // the circle is wider while she answers
	side := math.Copysign(90, nav.True(bearingDeg(to)).Minus(v.heading()))
	centre := nav.Along(v.heading().Add(side), radiusM)
	return to.Sub(centre).RangeM() < radiusM*margin
}

func bearingDeg(o nav.Offset) float64 { return math.Atan2(o.EastM, o.NorthM) * 180 / math.Pi }
