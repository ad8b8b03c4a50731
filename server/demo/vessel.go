package demo

import (
	"cmp"
	"context"
	"fmt"
	"log/slog"
	"net"
	"slices"
	"sync"
	"time"

	"wakeback/drift/nav"
	"wakeback/search/advice"
	"wakeback/search/incident"
)

// Config says how the demonstration runs. The zero value of a field means what
// stands beside it.
type Config struct {
	// Seed: the same gives the same weather, persons and instrument errors.
	Seed uint64
	// Now is the clock; nil means time.Now.
	Now func() time.Time
	// Pace is how many seconds pass in the world in one of the clock; 1. At
	// another pace the instruments tell another time than the clock.
	Pace float64
	// Log is told what the crew sees; nil discards it.
	Log *slog.Logger
}

// Vessel is the invented vessel, speaking on a socket of this machine. It is
// safe for use by several goroutines.
type Vessel struct {
	cfg     Config
	speaker *speaker

	mu     sync.Mutex // guards all below
	world  *world
	said   *instruments
	crew   crew
	byHand bool
	last   time.Time // of the clock, at the last tick
	due    time.Time // where the world shall be; a part of a step ahead of it
}

// New makes a vessel that listens on a port of this machine which the system
// chooses.
func New(cfg Config) (*Vessel, error) {
	if cfg.Now == nil {
		cfg.Now = time.Now
	}
	if cfg.Pace == 0 {
		cfg.Pace = 1
	}
	if cfg.Log == nil {
		cfg.Log = slog.New(slog.DiscardHandler)
	}
	ln, err := net.Listen("tcp", "127.0.0.1:0")
	if err != nil {
		return nil, fmt.Errorf("open the invented vessel's instruments: %w", err)
	}
	now := cfg.Now()
	return &Vessel{
		cfg: cfg, speaker: newSpeaker(ln), world: newWorld(now, cfg.Seed), said: newInstruments(cfg.Seed), last: now, due: now,
	}, nil
}

// FeedURL is where her instruments speak.
func (v *Vessel) FeedURL() string { return "tcp://" + v.speaker.ln.Addr().String() }

// Ask returns the incidents that the server has.
type Ask func(context.Context) ([]incident.State, error)

// Run lets her go until ctx ends, and then closes the socket. A nil ask leaves
// her on her course.
func (v *Vessel) Run(ctx context.Context, ask Ask) {
	var accepting sync.WaitGroup
	accepting.Go(v.speaker.accept)
	defer accepting.Wait()
	defer v.speaker.close()
	ticker := time.NewTicker(time.Second)
	defer ticker.Stop()
	for {
		v.round(ctx, ask)
		select {
		case <-ctx.Done():
			return
		case <-ticker.C:
		}
	}
}

// round is one second of hers. When the server cannot be asked, its last
// answer stands.
func (v *Vessel) round(ctx context.Context, ask Ask) {
	var states []incident.State
	known := false
	if ask != nil {
		var err error
		if states, err = ask(ctx); err != nil && ctx.Err() == nil {
			v.cfg.Log.Debug("the invented vessel cannot see the incidents", "error", err)
		}
		known = err == nil
	}
	v.speaker.say(v.tick(v.cfg.Now(), states, known))
}

// tick moves the world on to a moment of the clock and says what the
// instruments say then.
func (v *Vessel) tick(now time.Time, states []incident.State, known bool) string {
	v.mu.Lock()
	defer v.mu.Unlock()
	passed := now.Sub(v.last)
	v.last = now
	const slept = 5 * time.Second // no tick is so late on a machine that is awake
	if passed < 0 || passed > slept {
		v.due = v.due.Add(passed) // the clock was set, or the machine slept: nothing moved
		v.world.at = v.due
		passed = 0
	}
	v.due = v.due.Add(time.Duration(float64(passed) * v.cfg.Pace))
	v.world.advance(v.due)
	if known {
		v.follow(states)
	}
	return v.said.sentences(v.world)
}

// follow does what the log asks for.
func (v *Vessel) follow(states []incident.State) {
	if err := v.world.mend(states); err != nil {
		v.cfg.Log.Error("demonstration", "error", err)
	}
	if v.byHand {
		return
	}
	before := v.crew.beside
	v.crew.turnTo(v.world, states, v.own())
	if v.crew.beside && !before {
		v.cfg.Log.Info("the invented vessel is beside the invented person: say so on the phone, alongside, then aboard")
	}
}

// own is what her instruments last said.
func (v *Vessel) own() advice.Own {
	return advice.Own{
		Fix: nav.Some(v.said.last), Source: incident.FromVessel,
		Heading: nav.Some(v.world.hull.heading()), HeadingAt: v.world.at,
		StwKn: nav.Some(v.world.hull.speedMs / nav.MsPerKn),
	}
}

// FollowSteer gives the helm to the crew, who turn back by the advice when
// someone was marked. It is so from the start.
func (v *Vessel) FollowSteer() {
	v.mu.Lock()
	defer v.mu.Unlock()
	v.byHand, v.crew = false, crew{}
}

// SetHelm holds the rudder, from -1 (hard a-port) to 1 (hard a-starboard).
func (v *Vessel) SetHelm(rudder float64) {
	v.mu.Lock()
	defer v.mu.Unlock()
	v.byHand = true
	v.world.helm.course, v.world.helm.rudder = nav.None[nav.TrueDeg](), clamp(rudder, 1)
}

// Steer has the helm come to a heading.
func (v *Vessel) Steer(heading nav.TrueDeg) {
	v.mu.Lock()
	defer v.mu.Unlock()
	v.byHand, v.world.helm.course = true, nav.Some(heading)
}

// SetSpeed orders a speed through the water, 0 to 8 kn, which is all she has.
func (v *Vessel) SetSpeed(kn float64) {
	v.mu.Lock()
	defer v.mu.Unlock()
	v.byHand, v.world.helm.speedKn = true, max(0, min(8, kn))
}

// Truth is how things truly are: what the demonstration knows and the program
// does not.
type Truth struct {
	At      time.Time
	Vessel  nav.Position
	Heading nav.TrueDeg
	SpeedKn float64 // through the water
	Persons []TruePerson
}

// TruePerson is where someone in the water truly is.
type TruePerson struct {
	Incident incident.IncidentID
	No       incident.PersonNo
	Position nav.Position
	RangeM   float64 // from the vessel
}

// Truth is how things are now, the persons in order of their range.
func (v *Vessel) Truth() Truth {
	v.mu.Lock()
	defer v.mu.Unlock()
	w := v.world
	t := Truth{At: w.at, Vessel: w.hull.place, Heading: w.hull.heading(), SpeedKn: w.hull.speedMs / nav.MsPerKn}
	for id, p := range w.persons {
		t.Persons = append(t.Persons, TruePerson{id.incident, id.no, p.place, w.to(p.place).RangeM()})
	}
	slices.SortFunc(t.Persons, func(a, b TruePerson) int { return cmp.Compare(a.RangeM, b.RangeM) })
	return t
}
