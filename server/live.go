package server

import (
	"context"
	"fmt"
	"slices"
	"time"

	"wakeback/drift/nav"
	"wakeback/search/advice"
	"wakeback/search/incident"
	"wakeback/server/feed"
	"wakeback/server/hub"
)

const (
	// pace of the loop while someone is in the water: a boat hard over turns
	// through four degrees in it. Once a second otherwise.
	livePace = 200 * time.Millisecond
	calmPace = time.Second
)

// fixMessage is where the own vessel is.
type fixMessage struct {
	T string `json:"t"`
	// Null when it is not known where the vessel is.
	Position   nav.Opt[nav.Position]   `json:"position"`
	At         time.Time               `json:"at"`
	AgeS       nav.Opt[float64]        `json:"age_s"`
	SogKn      nav.Opt[float64]        `json:"sog_kn"`
	CogDeg     nav.Opt[nav.TrueDeg]    `json:"cog_deg"`
	HeadingDeg nav.Opt[nav.TrueDeg]    `json:"heading_deg"`
	Source     incident.PositionSource `json:"source"`
	ErrorM     nav.Opt[float64]        `json:"error_m"`
	Stale      bool                    `json:"stale"`
}

// steerMessage is what to show for one person.
type steerMessage struct {
	T string `json:"t"`
	advice.Frame
}

// live says where the vessel is and how to steer. It never touches the disk:
// one that hangs must not hold up the arrow.
type live struct {
	s     *Server
	shown []string  // keys of the steer words that clients hold
	last  time.Time // of the last round
}

func (s *Server) runLive(ctx context.Context) {
	l := &live{s: s}
	ticker := time.NewTicker(livePace)
	defer ticker.Stop()
	for {
		l.round(s.now())
		select {
		case <-ctx.Done():
			return
		case <-s.changed:
			l.last = time.Time{} // what changed is shown at once
		case <-ticker.C:
		}
	}
}

// round is one look at the vessel and the incidents.
func (l *live) round(now time.Time) {
	states := l.s.book.live()
	if len(states) == 0 && now.Sub(l.last).Abs() < calmPace {
		return
	}
	l.last = now
	vessel := l.s.vessel.now(now)
	l.remember(vessel)
	words, keys := l.words(now, vessel, states)
	if err := l.s.hub.Show(words...); err != nil {
		l.s.log.Error("show", "error", err)
	}
	over := slices.DeleteFunc(l.shown, func(k string) bool { return slices.Contains(keys, k) })
	l.s.hub.Forget(over...)
	l.shown = keys
}

// remember puts a new fix into the track, once a second at most. A recording
// that is replayed is no track of this vessel today.
func (l *live) remember(v feed.Vessel) {
	f, ok := v.FixNow().Get()
	if !ok || v.Replay {
		return
	}
	if last, ok := l.s.vessel.last().Get(); ok && f.At.Sub(last.At) < time.Second {
		return
	}
	l.s.vessel.remember(f)
}

// words are the newest words for all screens: the fix, and for every person
// of every open incident who is not aboard how to steer.
func (l *live) words(now time.Time, v feed.Vessel, states []incident.State) ([]hub.Word, []string) {
	mine, fixAge := own(v, now)
	words := []hub.Word{{Key: "fix", Message: fixOf(mine, fixAge, now)}}
	var keys []string
	for _, st := range states {
		for _, p := range st.Persons {
			if p.Status == incident.IsAboard && len(st.Persons) > 1 {
				continue
			}
			in := advice.Input{Now: now, State: st, Own: mine, Person: nav.Some(p.No)}
			key := fmt.Sprintf("steer/%s/%d", st.ID, p.No)
			words = append(words, hub.Word{Key: key, Message: steerMessage{"steer", honest(advice.Steer(in), fixAge)}})
			keys = append(keys, key)
		}
	}
	return words, keys
}

// honest gives a frame that rests on a dead reckoning the age of the fix
// behind it.
func honest(f advice.Frame, fixAge nav.Opt[float64]) advice.Frame {
	age, ok := fixAge.Get()
	if fix, there := f.Fix.Get(); ok && there {
		fix.AgeS, fix.Stale = age, true
		f.Fix = nav.Some(fix)
	}
	return f
}

func fixOf(o advice.Own, fixAge nav.Opt[float64], now time.Time) fixMessage {
	m := fixMessage{T: "fix", At: now.UTC(), HeadingDeg: o.Heading, Source: incident.FromNothing, Stale: true}
	f, ok := o.Fix.Get()
	if !ok {
		return m
	}
	m.Position, m.At, m.Source = nav.Some(f.Position), f.At.UTC(), o.Source
	m.SogKn, m.CogDeg, m.ErrorM = f.SogKn, f.CogTrue, f.ErrorM
	m.AgeS, m.Stale = nav.Some(max(now.Sub(f.At).Seconds(), 0)), false
	if age, ok := fixAge.Get(); ok {
		m.AgeS, m.Stale = nav.Some(age), true
	}
	return m
}
