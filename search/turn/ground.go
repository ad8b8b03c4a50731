package turn

import (
	"time"

	"wakeback/drift/nav"
)

// GroundPath is the path of a result over the ground, in a current, from the
// place where the person fell. The path of a result itself is in the water's
// frame, in which both are carried alike; delay is that from the fall to the
// first order, during which the water has moved already.
func (res Result) GroundPath(current nav.Velocity, delay time.Duration) []Point {
	out := make([]Point, len(res.Path))
	for i, p := range res.Path {
		p.Offset = p.Offset.Add(carried(current, delay, p.TS))
		out[i] = p
	}
	return out
}

// carried is how far the water has gone at a moment of a manoeuvre.
func carried(current nav.Velocity, delay time.Duration, ts float64) nav.Offset {
	s := delay.Seconds() + ts
	return nav.Offset{EastM: current.EastMs * s, NorthM: current.NorthMs * s}
}

// PersonAt is where the person is, ts seconds after the first order: in the
// water's frame with a nil current, else over the ground.
func (c Case) PersonAt(ts float64, current nav.Velocity) nav.Offset {
	return carried(c.PersonDrift.Add(current), c.Delay, ts)
}
