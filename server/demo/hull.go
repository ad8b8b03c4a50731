package demo

import (
	"math"

	"wakeback/drift/nav"
)

// The invented hull: a small motor sailer under engine. The figures are our
// choice; they are not those that the program assumes.
const (
	cruiseKn   = 6.0
	radiusM    = 25.0 // of the circle with the rudder hard over
	yawLagS    = 2.0  // of the yaw rate behind the rudder
	speedLagS  = 6.0
	turnLoss   = 0.25 // of the speed, in a hard turn
	rudderRate = 0.5  // of hard over, a second
	// washMs: with the engine ahead the rudder works even without way.
	washMs = 0.7
	// windage is the share of the wind at which she is blown sideways, and
	// where she lies stopped.
	windage = 0.02
	// Waves push the bow: the spread of the yaw rate, and how long one lasts.
	waveDegS, waveS = 1.2, 2.5
)

// hull is how the vessel lies and moves.
type hull struct {
	place      nav.Position
	headingDeg float64
	yawDegS    float64
	speedMs    float64 // through the water, ahead
	rudder     float64 // -1 hard a-port to 1 hard a-starboard
	wave       float64 // degrees a second that the sea adds
}

func (h hull) heading() nav.TrueDeg { return nav.True(h.headingDeg) }

// water is her motion through the water, with what the wind adds.
func (h hull) water(wind nav.Velocity) nav.Velocity {
	return nav.Towards(h.heading(), h.speedMs/nav.MsPerKn).Add(wind.Scale(windage))
}

// step moves her on by dt seconds, with the rudder and the speed that are
// ordered. gust is a draw of a normal distribution.
func (h *hull) step(dt, rudder, speedKn, gust float64, wind, stream nav.Velocity) {
	h.rudder += clamp(rudder-h.rudder, rudderRate*dt)
	flow := h.speedMs
	if speedKn > 0 {
		flow = max(flow, washMs)
	}
	hard := cruiseKn * nav.MsPerKn / radiusM * 180 / math.Pi
	h.yawDegS += (h.rudder*flow/radiusM*180/math.Pi - h.yawDegS) * dt / yawLagS
	h.wave += -h.wave*dt/waveS + waveDegS*math.Sqrt(2*dt/waveS)*gust
	h.headingDeg = nav.NormDeg(h.headingDeg + (h.yawDegS+h.wave)*dt)
	want := speedKn * nav.MsPerKn * (1 - turnLoss*min(1, math.Abs(h.yawDegS)/hard))
	h.speedMs += (want - h.speedMs) * dt / speedLagS
	over := h.water(wind).Add(stream)
	h.place = h.place.Shift(nav.Offset{EastM: over.EastMs * dt, NorthM: over.NorthMs * dt})
}

func clamp(v, most float64) float64 { return max(-most, min(most, v)) }
