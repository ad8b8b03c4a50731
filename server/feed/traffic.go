package feed

import (
	"cmp"
	"slices"
	"time"

	"wakeback/drift/nav"
	"wakeback/server/feed/ais"
	"wakeback/server/feed/nmea"
)

// Target is another station heard over AIS.
type Target struct {
	MMSI     uint32                `json:"mmsi"`
	Name     string                `json:"name,omitempty"`
	Position nav.Opt[nav.Position] `json:"position"`
	SogKn    nav.Opt[float64]      `json:"sog_kn"`
	CogTrue  nav.Opt[nav.TrueDeg]  `json:"cog_deg"`
	Heading  nav.Opt[nav.TrueDeg]  `json:"heading_deg"`
	At       time.Time             `json:"at"`
	Source   string                `json:"source"`
}

// traffic is what is heard over AIS. A flood of false stations cannot bury a
// beacon: beacons are told at once and kept apart from the bounded table.
type traffic struct {
	parts   map[sourceID]*ais.Assembler
	targets map[uint32]*Target
}

// maxTargets bounds the table; forgetAfter is when a station that is not heard
// any more leaves it (the slowest class reports every three minutes at anchor).
// Our choice.
const (
	maxTargets  = 400
	forgetAfter = 10 * time.Minute
)

func newTraffic() *traffic {
	return &traffic{parts: make(map[sourceID]*ais.Assembler), targets: make(map[uint32]*Target)}
}

// hear takes in a fragment and returns the report of a beacon, if it is one.
func (tr *traffic) hear(src sourceID, name string, v *nmea.VDM, now time.Time) (nav.Opt[Beacon], error) {
	a := tr.parts[src]
	if a == nil {
		a = &ais.Assembler{}
		tr.parts[src] = a
	}
	m, done, err := a.Add(ais.Fragment{
		Count: v.Fragments, Number: v.Fragment, Sequence: v.Sequence.Or(-1), Channel: v.Channel, Payload: v.Payload, FillBits: v.FillBits,
	}, now)
	if err != nil || !done || v.Own {
		return nav.None[Beacon](), err
	}
	if alarm := ais.AlarmOf(m); alarm != ais.NoAlarm {
		return nav.Some(Beacon{
			MMSI: m.MMSI, Position: m.Position, SogKn: m.SogKn, CogTrue: m.CogTrue, Test: alarm == ais.Test, At: now,
		}), nil
	}
	tr.note(m, name, now)
	return nav.None[Beacon](), nil
}

func (tr *traffic) note(m ais.Message, source string, now time.Time) {
	t := tr.targets[m.MMSI]
	if t == nil {
		tr.forget(now)
		t = &Target{MMSI: m.MMSI}
		tr.targets[m.MMSI] = t
	}
	t.At, t.Source = now, source
	if m.Name != "" {
		t.Name = m.Name
	}
	if m.Position.IsSet() {
		t.Position, t.SogKn, t.CogTrue, t.Heading = m.Position, m.SogKn, m.CogTrue, m.Heading
	}
}

// forget drops the stations not heard for long, and the oldest when the table
// is full.
func (tr *traffic) forget(now time.Time) {
	var oldest *Target
	for id, t := range tr.targets {
		if now.Sub(t.At) > forgetAfter {
			delete(tr.targets, id)
		} else if oldest == nil || t.At.Before(oldest.At) {
			oldest = t
		}
	}
	if len(tr.targets) >= maxTargets && oldest != nil {
		delete(tr.targets, oldest.MMSI)
	}
}

func (tr *traffic) list() []Target {
	out := make([]Target, 0, len(tr.targets))
	for _, t := range tr.targets {
		out = append(out, *t)
	}
	slices.SortFunc(out, func(a, b Target) int { return cmp.Compare(a.MMSI, b.MMSI) })
	return out
}

// Targets are the other stations heard over AIS, by identity.
func (f *Feeds) Targets() []Target {
	f.mu.Lock()
	defer f.mu.Unlock()
	return f.traffic.list()
}
