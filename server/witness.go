package server

import (
	"context"
	"errors"
	"math"
	"time"

	"wakeback/drift/nav"
	"wakeback/drift/weather"
	"wakeback/search/incident"
	"wakeback/server/feed"
	"wakeback/server/store"
)

// witness writes into the log of an incident what the instruments say of wind,
// current and water: so that every screen, with the server or alone, reckons
// the drift from the same words, and each of them stands there with its time.
type witness struct {
	s       *Server
	wind    average
	current average
	sdMs    float64 // of one component of the current, as measured last
	vdr     bool    // the current is an instrument's own figure
	steady  nav.Opt[nav.TrueDeg]
	since   time.Time // since when the heading is steady
}

// How long wind and current are averaged, and after how many samples a mean
// counts. Our choice: leeway goes with the mean of some minutes, not with a
// gust; the current needs longer, because log and compass are rough.
const (
	windOver    = 3 * time.Minute
	currentOver = 6 * time.Minute
	fewest      = 20
)

// What has to change before it is said again: about the error of the
// instruments, so that the log does not fill with noise. After sayAgain it is
// said even so, to stand there as still holding. Our choice.
const (
	windTurnDeg  = 15
	windChangeKn = 3
	currentKn    = 0.3
	waterC       = 1
	sayAgain     = 10 * time.Minute
)

// A heading counts as steady that stayed within steadyDeg for steadyFor: in a
// turn, log and compass lag. A small boat's helm weaves by some degrees all the
// time, which the mean takes out. Our choice.
const (
	steadyDeg = 12
	steadyFor = 15 * time.Second
)

func (s *Server) runWitness(ctx context.Context) {
	w := &witness{s: s, wind: average{over: windOver}, current: average{over: currentOver}}
	ticker := time.NewTicker(time.Second)
	defer ticker.Stop()
	for {
		select {
		case <-ctx.Done():
			return
		case <-ticker.C:
			w.round(s.now())
		}
	}
}

// round is one look at the instruments.
func (w *witness) round(now time.Time) {
	v := w.s.vessel.now(now)
	if v.Replay {
		return // a recording says nothing of today
	}
	w.listen(v, now)
	for _, st := range w.s.book.live() {
		w.testify(st, v, now)
	}
}

// listen takes in one second of the instruments.
func (w *witness) listen(v feed.Vessel, now time.Time) {
	if wind, ok := feed.Fresh(v.Wind).Get(); ok {
		w.wind.add(now, nav.BlowingFrom(wind.FromDeg, wind.SpeedKn))
	}
	w.vdr = false
	if c, ok := feed.Fresh(v.Current).Get(); ok {
		w.vdr = true
		w.current.add(now, nav.Towards(c.SetDeg, c.DriftKn))
		return
	}
	if m, ok := w.measured(v, now); ok {
		w.sdMs = m.Cov.SDMs()
		w.current.add(now, m.Velocity)
	}
}

// measured is the current from motion over the ground less that through the
// water, while the vessel holds her course.
func (w *witness) measured(v feed.Vessel, now time.Time) (weather.Measurement, bool) {
	heading, okHeading := feed.Fresh(v.HeadingTrue).Get()
	stw, okStw := feed.Fresh(v.StwKn).Get()
	sog, okSog := feed.Fresh(v.SogKn).Get()
	cog, okCog := feed.Fresh(v.CogTrue).Get()
	if !okHeading {
		w.steady = nav.None[nav.TrueDeg]()
		return weather.Measurement{}, false
	}
	if was, ok := w.steady.Get(); !ok || math.Abs(heading.Minus(was)) > steadyDeg {
		w.steady, w.since = nav.Some(heading), now
	}
	if !okStw || !okSog || !okCog || now.Sub(w.since) < steadyFor {
		return weather.Measurement{}, false
	}
	m, err := weather.SetAndDrift(weather.Underway{CogTrue: cog, SogKn: sog, Heading: heading, StwKn: stw})
	return m, err == nil
}

// testify says what is new about the weather in one incident.
func (w *witness) testify(st incident.State, v feed.Vessel, now time.Time) {
	if wind, ok := w.wind.mean(now); ok && w.windIsNew(st, wind, now) {
		from := wind.Direction().Or(0).Reciprocal()
		w.say(st, now, incident.KindWind, incident.WindObserved{
			FromDeg: tenthDeg(from), SpeedKn: tenthOf(wind.SpeedKn()), ObservedBy: incident.ObservedBy{Source: "instrument", Name: "mean of minutes"},
		})
	}
	if current, ok := w.current.mean(now); ok && w.currentIsNew(st, current, now) {
		body := incident.CurrentObserved{
			SetDeg: tenthDeg(current.Direction().Or(0)), DriftKn: hundredthOf(current.SpeedKn()),
			ObservedBy: incident.ObservedBy{Source: "instrument", Name: "instrument"},
		}
		if !w.vdr {
			body.ObservedBy, body.DriftSd = incident.ObservedBy{Source: "measured", Name: "GPS, log and compass"}, hundredthOf(w.sdMs/nav.MsPerKn)
		}
		w.say(st, now, incident.KindCurrent, body)
	}
	if c, ok := feed.Fresh(v.WaterC).Get(); ok && w.waterIsNew(st, c, now) {
		w.say(st, now, incident.KindWater, incident.WaterObserved{TempC: tenthOf(c), ObservedBy: incident.ObservedBy{Source: "instrument"}})
	}
}

func (w *witness) say(st incident.State, now time.Time, kind incident.Kind, body any) {
	_, err := w.s.ledger.write(func(wr *writing) error {
		_, err := wr.author(incident.Event{Incident: st.ID, At: now, Drill: st.Drill}, kind, body)
		return err
	})
	if err != nil && !errors.Is(err, store.ErrNotDurable) {
		w.s.log.Error("write down the weather", "kind", kind, "error", err)
	}
	w.s.nudge()
}

// mine is whether the server said it, from the instruments.
func (w *witness) mine(s incident.Said) bool { return s.Device == w.s.ledger.self }

func (w *witness) windIsNew(st incident.State, wind nav.Velocity, now time.Time) bool {
	for i := len(st.Winds) - 1; i >= 0; i-- {
		last := st.Winds[i]
		if !w.mine(last.Said) {
			continue
		}
		turned := math.Abs(wind.Direction().Or(0).Reciprocal().Minus(last.FromDeg))
		light := wind.SpeedKn() < windChangeKn && last.SpeedKn < windChangeKn
		return now.Sub(last.At) >= sayAgain || math.Abs(wind.SpeedKn()-last.SpeedKn) > windChangeKn || turned > windTurnDeg && !light
	}
	return true
}

func (w *witness) currentIsNew(st incident.State, current nav.Velocity, now time.Time) bool {
	for i := len(st.Currents) - 1; i >= 0; i-- {
		last := st.Currents[i]
		if !w.mine(last.Said) {
			continue
		}
		change := current.Sub(nav.Towards(last.SetDeg, last.DriftKn)).SpeedKn()
		return now.Sub(last.At) >= sayAgain || change > currentKn
	}
	return true
}

func (w *witness) waterIsNew(st incident.State, c float64, now time.Time) bool {
	for i := len(st.Waters) - 1; i >= 0; i-- {
		if last := st.Waters[i]; w.mine(last.Said) {
			return math.Abs(c-last.TempC) > waterC
		}
	}
	return true
}

// average is the mean of a velocity over the last while.
type average struct {
	over    time.Duration
	samples []sampled
}

type sampled struct {
	at time.Time
	v  nav.Velocity
}

func (a *average) add(at time.Time, v nav.Velocity) {
	a.trim(at)
	a.samples = append(a.samples, sampled{at, v})
}

// trim drops what is too old, and what lies ahead when the clock was set back.
func (a *average) trim(now time.Time) {
	keep := a.samples[:0]
	for _, s := range a.samples {
		if age := now.Sub(s.at); age >= 0 && age <= a.over {
			keep = append(keep, s)
		}
	}
	a.samples = keep
}

// mean is absent until there are enough samples.
func (a *average) mean(now time.Time) (nav.Velocity, bool) {
	a.trim(now)
	if len(a.samples) < fewest {
		return nav.Velocity{}, false
	}
	var sum nav.Velocity
	for _, s := range a.samples {
		sum = sum.Add(s.v)
	}
	return sum.Scale(1 / float64(len(a.samples))), true
}

func tenthDeg(d nav.TrueDeg) nav.TrueDeg { return nav.True(math.Round(float64(d)*10) / 10) }
func tenthOf(v float64) float64          { return math.Round(v*10) / 10 }
func hundredthOf(v float64) float64      { return math.Round(v*100) / 100 }
