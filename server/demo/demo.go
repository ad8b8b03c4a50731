package demo

import (
	"context"
	"encoding/json"
	"fmt"
	"log/slog"
	"net"
	"net/http"
	"sync"
	"time"

	"wakeback/drift/nav"
	"wakeback/search/advice"
	"wakeback/search/incident"
)

// Vessel is the invented vessel, speaking on a socket of this machine.
type Vessel struct {
	log *slog.Logger
	ln  net.Listener
	now func() time.Time

	// mu guards all below.
	mu      sync.Mutex
	world   *world
	clients map[net.Conn]bool
	case_   incident.IncidentID
	since   time.Time // when she saw that incident first
	told    bool      // that she is at the person
}

// New makes a vessel that listens on a port of this machine which the system
// chooses. The same seed gives the same truth.
func New(log *slog.Logger, now func() time.Time, seed uint64) (*Vessel, error) {
	ln, err := net.Listen("tcp", "127.0.0.1:0")
	if err != nil {
		return nil, fmt.Errorf("open the invented vessel's instruments: %w", err)
	}
	return &Vessel{log: log, ln: ln, now: now, world: newWorld(now(), seed), clients: make(map[net.Conn]bool)}, nil
}

// FeedURL is where her instruments speak.
func (v *Vessel) FeedURL() string { return "tcp://" + v.ln.Addr().String() }

// Run lets her go until ctx ends. ask returns the incidents that the server
// has; a nil ask leaves her on her course.
func (v *Vessel) Run(ctx context.Context, ask func(context.Context) ([]incident.State, error)) {
	var parts sync.WaitGroup
	parts.Go(func() { v.accept(ctx) })
	ticker := time.NewTicker(time.Second)
	defer ticker.Stop()
	for {
		select {
		case <-ctx.Done():
			v.close()
			parts.Wait()
			return
		case <-ticker.C:
			var states []incident.State
			if ask != nil {
				var err error
				if states, err = ask(ctx); err != nil && ctx.Err() == nil {
					v.log.Debug("the invented vessel cannot see the incidents", "error", err)
				}
			}
			v.tick(states)
		}
	}
}

func (v *Vessel) accept(ctx context.Context) {
	for {
		c, err := v.ln.Accept()
		if err != nil {
			return
		}
		v.mu.Lock()
		if ctx.Err() != nil {
			c.Close()
		} else {
			v.clients[c] = true
		}
		v.mu.Unlock()
	}
}

func (v *Vessel) close() {
	v.ln.Close()
	v.mu.Lock()
	defer v.mu.Unlock()
	for c := range v.clients {
		c.Close()
	}
	v.clients = map[net.Conn]bool{}
}

// tick is one second of hers: the helm, the way made, the instruments.
func (v *Vessel) tick(states []incident.State) {
	v.mu.Lock()
	defer v.mu.Unlock()
	v.helm(states)
	const parts = 10
	dt := v.now().Sub(v.world.at).Seconds() / parts
	if dt < 0 || dt > 1 {
		v.world.at, dt = v.now(), 0 // the clock was set, or the machine slept
	}
	for range parts {
		v.world.step(dt)
	}
	lines := []byte(v.world.sentences())
	for c := range v.clients {
		_ = c.SetWriteDeadline(time.Now().Add(500 * time.Millisecond))
		if _, err := c.Write(lines); err != nil {
			c.Close()
			delete(v.clients, c)
		}
	}
}

// reaction is how long the invented crew takes before the helm goes over.
const reaction = 8 * time.Second

// helm steers by the advice of the newest incident, after the crew's reaction;
// without one she goes on her way.
func (v *Vessel) helm(states []incident.State) {
	st, ok := advice.Choose(states)
	if !ok || allAboard(st) {
		v.case_, v.told, v.world.overside = "", false, false
		v.world.helmFor, v.world.wantKn = courseDeg, cruiseKn
		return
	}
	if v.case_ != st.ID {
		v.case_, v.since, v.told = st.ID, v.world.at, false
		v.world.fall()
	}
	if v.world.at.Sub(v.since) < reaction {
		return
	}
	f := advice.Steer(advice.Input{Now: v.world.at, State: st, Own: v.own()})
	v.follow(f)
	if r := v.world.rangeM(); r < 40 && !v.told {
		v.told = true
		v.log.Info("the invented person is in sight", "range_m", int(r))
	}
}

// follow does what the frame says, slowing down near the datum.
func (v *Vessel) follow(f advice.Frame) {
	v.world.wantKn = cruiseKn
	bearing, ok := f.Do.BearingDeg.Get()
	if !ok {
		bearing, ok = f.BearingDeg.Get()
	}
	if !ok {
		return
	}
	v.world.helmFor = bearing
	switch r, _ := f.RangeM.Get(); {
	case f.Do.Code == advice.SteerLeg:
	case f.Do.Code == advice.Recover, r < 15:
		v.world.wantKn = 0
	case r < 120:
		v.world.wantKn = slowKn
	}
}

func allAboard(s incident.State) bool {
	for _, p := range s.Persons {
		if p.Status != incident.IsAboard {
			return false
		}
	}
	return len(s.Persons) > 0
}

func (v *Vessel) own() advice.Own {
	over := v.world.ground()
	return advice.Own{
		Source: incident.FromVessel, Heading: nav.Some(nav.True(v.world.heading)), HeadingAt: v.world.at,
		Fix: nav.Some(nav.Fix{At: v.world.at, Position: v.world.place, SogKn: nav.Some(over.SpeedKn()), CogTrue: over.Direction()}),
	}
}

// Ask reads the incidents of a server that lets anyone on this machine read.
func Ask(base string) func(context.Context) ([]incident.State, error) {
	client := &http.Client{Timeout: 2 * time.Second}
	return func(ctx context.Context) ([]incident.State, error) {
		req, err := http.NewRequestWithContext(ctx, http.MethodGet, base+"/api/v1/incidents", nil)
		if err != nil {
			return nil, err
		}
		resp, err := client.Do(req)
		if err != nil {
			return nil, err
		}
		defer resp.Body.Close()
		if resp.StatusCode != http.StatusOK {
			return nil, fmt.Errorf("read the incidents: %s", resp.Status)
		}
		var list struct {
			Incidents []incident.State `json:"incidents"`
		}
		if err := json.NewDecoder(resp.Body).Decode(&list); err != nil {
			return nil, fmt.Errorf("read the incidents: %w", err)
		}
		return list.Incidents, nil
	}
}
