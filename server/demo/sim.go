package demo

import (
	"math"
	"math/rand/v2"
	"time"

	"wakeback/drift/nav"
	"wakeback/search/turn"
)

// Name of the invented vessel.
const Name = "Testvessel Puffin"

// start is out in the German Bight, far from any danger; the place is only a
// place. courseDeg and cruiseKn are how she goes until someone marks.
var start = nav.PositionFromDegrees(54.1, 7.9)

const (
	courseDeg = 290
	cruiseKn  = 6
	slowKn    = 2
	radiusM   = 25
)

// world is the truth of the demonstration.
type world struct {
	at      time.Time
	place   nav.Position // of the vessel
	heading float64
	rate    float64
	speedMs float64
	helmFor nav.TrueDeg // course the helm is told to steer
	wantKn  float64
	rng     *rand.Rand

	person   nav.Position
	overside bool
	leewayMs float64 // share of the wind, of this person, on this day
	leewayTo float64 // degrees off downwind
}

func newWorld(at time.Time, seed uint64) *world {
	rng := rand.New(rand.NewPCG(seed, 1))
	return &world{
		at: at, place: start, heading: courseDeg, speedMs: cruiseKn * nav.MsPerKn,
		helmFor: courseDeg, wantKn: cruiseKn, rng: rng,
		leewayMs: 0.011 + 0.003*rng.NormFloat64(), leewayTo: 25 * (rng.Float64()*2 - 1),
	}
}

// wind is the true wind: south-west, shifting a little and gusting.
func (w *world) wind() nav.Velocity {
	minutes := float64(w.at.Unix()%86400) / 60
	from := 240 + 8*math.Sin(minutes/11)
	kn := 14 + 2*math.Sin(minutes/3.7) + 0.5*math.Sin(minutes*7)
	return nav.BlowingFrom(nav.True(from), kn)
}

// current is a tidal stream that turns once in about twelve hours.
func (w *world) current() nav.Velocity {
	const tide = 12.42 * 3600
	phase := 2 * math.Pi * math.Mod(float64(w.at.Unix()), tide) / tide
	along := nav.Towards(100, 0.9*math.Cos(phase))
	across := nav.Towards(10, 0.3*math.Sin(phase))
	return along.Add(across)
}

// step moves everything on by dt seconds.
func (w *world) step(dt float64) {
	w.at = w.at.Add(time.Duration(dt * float64(time.Second)))
	m := turn.FromRadius(cruiseKn, radiusM)
	off := w.helmFor.Minus(nav.True(w.heading)) - w.rate*m.LagS
	helm := math.Max(-1, math.Min(1, off/30))
	hard := m.SpeedMs / m.RadiusM * 180 / math.Pi
	target := helm*hard*w.speedMs/m.SpeedMs + 0.3*w.rng.NormFloat64()
	w.rate += (target - w.rate) / m.LagS * dt
	w.heading = nav.NormDeg(w.heading + w.rate*dt)
	want := w.wantKn * nav.MsPerKn * (1 - 0.25*math.Min(1, math.Abs(w.rate)/hard))
	w.speedMs += (want - w.speedMs) / 8 * dt
	through := nav.Towards(nav.True(w.heading), w.speedMs/nav.MsPerKn)
	w.place = w.place.Shift(scaled(through.Add(w.current()), dt))
	if w.overside {
		wind := w.wind()
		leeway := wind.Scale(w.leewayMs).Rotate(w.leewayTo)
		w.person = w.person.Shift(scaled(leeway.Add(w.current()), dt))
	}
}

func scaled(v nav.Velocity, dt float64) nav.Offset {
	return nav.Offset{EastM: v.EastMs * dt, NorthM: v.NorthMs * dt}
}

// ground is the vessel's motion over the ground.
func (w *world) ground() nav.Velocity {
	return nav.Towards(nav.True(w.heading), w.speedMs/nav.MsPerKn).Add(w.current())
}

// fall puts the person into the water where the vessel is.
func (w *world) fall() { w.person, w.overside = w.place, true }

// rangeM is how far the person is.
func (w *world) rangeM() float64 { return nav.Inverse(w.place, w.person).RangeM }
