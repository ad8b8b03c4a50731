package server

import (
	"sync"
	"time"

	"wakeback/drift/nav"
	"wakeback/search/advice"
	"wakeback/search/incident"
	"wakeback/server/feed"
)

// Instruments are what tells about the vessel: package feed, running.
type Instruments interface {
	// Vessel is all that the instruments say at a moment.
	Vessel(now time.Time) feed.Vessel
	// Updates tells what is new.
	Updates() <-chan feed.Update
}

// vessel is the own vessel: what its instruments say now, and its track.
type vessel struct {
	instruments Instruments // nil when there are none

	mu      sync.Mutex // guards both
	track   nav.Track  // of the last keepTrack
	unsaved []nav.Fix  // of track, not on disk yet
}

const (
	// keepTrack is how much of the track is held in memory, for marks of a
	// moment that has passed. Our choice: a phone that was alone for a watch.
	keepTrack = 6 * time.Hour
	// trackGap is over how long a gap two fixes are joined by a straight line.
	// Our choice: at 6 kn a boat goes 30 m in it.
	trackGap = 10 * time.Second
	// present is how near to now a moment counts as now. Our choice: the time a
	// request takes, and the second between two fixes.
	present = 2 * time.Second
)

func (v *vessel) now(now time.Time) feed.Vessel {
	if v.instruments == nil {
		return feed.Vessel{At: now.UTC()}
	}
	return v.instruments.Vessel(now)
}

// remember puts a fix into the track.
func (v *vessel) remember(f nav.Fix) {
	v.mu.Lock()
	defer v.mu.Unlock()
	v.track.Add(f)
	v.track.Trim(f.At.Add(-keepTrack))
	v.unsaved = append(v.unsaved, f)
}

// load takes a track that is on disk.
func (v *vessel) load(fixes []nav.Fix) {
	v.mu.Lock()
	defer v.mu.Unlock()
	v.track = nav.NewTrack(fixes)
}

// pending takes out what is not on disk yet.
func (v *vessel) pending() []nav.Fix {
	v.mu.Lock()
	defer v.mu.Unlock()
	fixes := v.unsaved
	v.unsaved = nil
	return fixes
}

// maxUnsaved bounds the track that waits for a disk which cannot write; our
// choice, an hour at one fix a second. What is older stays in memory only.
const maxUnsaved = 3600

// putBack returns what could not be written.
func (v *vessel) putBack(fixes []nav.Fix) {
	v.mu.Lock()
	defer v.mu.Unlock()
	v.unsaved = append(fixes, v.unsaved...)
	if n := len(v.unsaved) - maxUnsaved; n > 0 {
		v.unsaved = v.unsaved[n:]
	}
}

// place is where the vessel was at a moment, and how well that is known.
type place struct {
	position nav.Position
	source   incident.PositionSource
	errorM   nav.Opt[float64]
	fixAgeS  nav.Opt[float64]
	sogKn    nav.Opt[float64]
	cog      nav.Opt[nav.TrueDeg]
	heading  nav.Opt[nav.TrueDeg]
}

// placeAt is where the vessel was at a moment: on its track if that is past,
// by its fix if that is now, else by dead reckoning. It is absent when there
// was no fix to reckon from.
func (v *vessel) placeAt(at, now time.Time) nav.Opt[place] {
	if now.Sub(at) > present {
		if p, ok := v.onTrack(at).Get(); ok {
			return nav.Some(p)
		}
	}
	state := v.now(now)
	where, ok := state.Where().Get()
	if !ok {
		return nav.None[place]()
	}
	p := place{
		position: where.Position, source: incident.FromVessel, errorM: where.ErrorM,
		fixAgeS: nav.Some(where.FixAgeS), sogKn: feed.Fresh(state.SogKn),
		cog: feed.Fresh(state.CogTrue), heading: feed.Fresh(state.HeadingTrue),
	}
	if where.DeadReckoned {
		p.source = incident.FromDR
	}
	if gone := now.Sub(at); gone > present {
		return v.backFrom(p, state, gone)
	}
	return nav.Some(p)
}

// onTrack is the recorded track at a moment.
func (v *vessel) onTrack(at time.Time) nav.Opt[place] {
	v.mu.Lock()
	f, ok := v.track.At(at, trackGap).Get()
	v.mu.Unlock()
	if !ok {
		return nav.None[place]()
	}
	return nav.Some(place{
		position: f.Position, source: incident.FromTrack, errorM: f.ErrorM,
		fixAgeS: nav.Some(0.0), sogKn: f.SogKn, cog: f.CogTrue,
	})
}

// backFrom carries a place back in time by the speed and course of now, where
// there is no track: the error grows by half the way, because nobody saw it.
// Longer than the limit it would be a guess.
func (v *vessel) backFrom(p place, state feed.Vessel, gone time.Duration) nav.Opt[place] {
	const limit = 2 * time.Minute // our choice: 370 m at 6 kn
	motion, ok := nav.Fix{SogKn: latest(state.SogKn), CogTrue: latest(state.CogTrue)}.Velocity().Get()
	if !ok || gone > limit {
		return nav.None[place]()
	}
	back := motion.Scale(-1).For(gone)
	p.position = p.position.Shift(back)
	p.source = incident.FromDR
	p.errorM = nav.Some(p.errorM.Or(0) + back.RangeM()/2)
	return nav.Some(p)
}

// latest is the value of a reading, stale or not.
func latest[T any](r nav.Opt[feed.Reading[T]]) nav.Opt[T] {
	if v, ok := r.Get(); ok {
		return nav.Some(v.Value)
	}
	return nav.None[T]()
}

// own is the vessel as advice is asked about it, with the age of the fix that
// a dead reckoning rests on.
func own(state feed.Vessel, now time.Time) (advice.Own, nav.Opt[float64]) {
	o := advice.Own{Heading: feed.Fresh(state.HeadingTrue), StwKn: feed.Fresh(state.StwKn)}
	if h, ok := state.HeadingTrue.Get(); ok {
		o.HeadingAt = h.At
	}
	if f, ok := state.FixNow().Get(); ok {
		o.Fix, o.Source = nav.Some(f), incident.FromVessel
		return o, nav.None[float64]()
	}
	d, ok := state.DeadReckoned.Get()
	if !ok {
		return o, nav.None[float64]()
	}
	o.Source = incident.FromDR
	o.Fix = nav.Some(nav.Fix{At: now, Position: d.Position, ErrorM: nav.Some(d.ErrorM)})
	return o, nav.Some(d.FixAgeS)
}

// last is the newest fix of the track.
func (v *vessel) last() nav.Opt[nav.Fix] {
	v.mu.Lock()
	defer v.mu.Unlock()
	return v.track.Last()
}
