package demo

import (
	"math/rand/v2"
	"time"

	"wakeback/drift/nav"
)

// Name of the invented vessel.
const Name = "Testvessel Puffin"

// start is open water, and only a place: nothing there is real.
var start = nav.PositionFromDegrees(54.1, 7.9)

// courseDeg is how she goes until someone marks.
const courseDeg = 290

const (
	// stepS is the step of the truth: a tenth of what the yaw takes to answer
	// is fine enough, and this is a twentieth.
	stepS = 0.1
	// keepTrack is how much of her true track is kept, to know where she was
	// when a mark was made; our choice, longer than a phone is alone in a trial.
	keepTrack = time.Hour
)

// world is the truth of the demonstration.
type world struct {
	at      time.Time
	hull    hull
	helm    helm
	weather weather
	persons map[who]*person
	track   nav.Track
	chance  *rand.Rand // of the truth; that of the instruments is another
}

func newWorld(at time.Time, seed uint64) *world {
	chance := rand.New(rand.NewPCG(seed, 1))
	w := &world{
		at:      at,
		hull:    hull{place: start, headingDeg: courseDeg, speedMs: cruiseKn * nav.MsPerKn},
		weather: weather{plane: nav.NewPlane(start), eddy: 6 * chance.Float64()},
		persons: make(map[who]*person),
		chance:  chance,
	}
	w.underWay()
	w.remember()
	return w
}

// underWay sends her on her way.
func (w *world) underWay() {
	w.helm = helm{course: nav.Some(nav.TrueDeg(courseDeg)), speedKn: cruiseKn}
}

// advance moves everything on to a moment. The steps are counted from where it
// is, so that the same moments give the same truth.
func (w *world) advance(to time.Time) {
	const step = time.Duration(stepS * float64(time.Second))
	for !w.at.Add(step).After(to) {
		w.at = w.at.Add(step)
		wind := w.weather.wind(w.at)
		w.hull.step(stepS, w.helm.order(w.hull), w.helm.speedKn, w.chance.NormFloat64(), wind, w.weather.stream(w.at, w.hull.place))
		for _, p := range w.persons {
			if off, ok := p.held.Get(); ok {
				p.place = w.hull.place.Shift(off)
				continue
			}
			p.step(stepS, wind, w.weather.stream(w.at, p.place))
		}
	}
	w.remember()
}

func (w *world) remember() {
	w.track.Add(nav.Fix{At: w.at, Position: w.hull.place})
	w.track.Trim(w.at.Add(-keepTrack))
}

// placeAt is where she truly was; where she is, for a moment that her track
// does not hold.
func (w *world) placeAt(at time.Time) nav.Position {
	if f, ok := w.track.At(at, time.Minute).Get(); ok {
		return f.Position
	}
	return w.hull.place
}

// fall puts a person into the water, where the vessel was at a moment, and lets
// them drift until now.
func (w *world) fall(id who, at time.Time) error {
	p, err := newPerson(w.placeAt(at), w.chance)
	if err != nil {
		return err
	}
	for t := at; w.at.Sub(at) < keepTrack && t.Before(w.at); t = t.Add(time.Second) {
		p.step(min(1, w.at.Sub(t).Seconds()), w.weather.wind(t), w.weather.stream(t, p.place))
	}
	w.persons[id] = p
	return nil
}

// ground is her motion over the ground.
func (w *world) ground() nav.Velocity {
	return w.hull.water(w.weather.wind(w.at)).Add(w.weather.stream(w.at, w.hull.place))
}

// to is where a place lies from her.
func (w *world) to(p nav.Position) nav.Offset { return nav.NewPlane(w.hull.place).Offset(p) }
