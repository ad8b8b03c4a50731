package server

import (
	"cmp"
	"slices"
	"sync"
	"time"

	"wakeback/drift/nav"
	"wakeback/search/incident"
)

// phoneFix is where a phone says it is.
type phoneFix struct {
	Device   incident.DeviceID    `json:"device"`
	Name     string               `json:"name"`
	At       time.Time            `json:"at"`
	Position nav.Position         `json:"position"`
	ErrorM   nav.Opt[float64]     `json:"error_m"`
	SogKn    nav.Opt[float64]     `json:"sog_kn"`
	CogDeg   nav.Opt[nav.TrueDeg] `json:"cog_deg"`
}

func (f phoneFix) fix() nav.Fix {
	return nav.Fix{At: f.At, Position: f.Position, ErrorM: f.ErrorM, SogKn: f.SogKn, CogTrue: f.CogDeg}
}

// phones holds the last word of each phone about where it is. A phone may be
// in the water with its owner, so nothing is steered by it here.
type phones struct {
	mu    sync.Mutex // guards both
	last  map[incident.DeviceID]phoneFix
	fresh []phoneFix // since the track was written last
}

// maxPhones bounds the phones held in memory; our choice, several crews.
const maxPhones = 100

// put takes a phone's word. Only that of a paired phone goes into a track: one
// that is not has no name that stays.
func (p *phones) put(f phoneFix, paired bool) {
	p.mu.Lock()
	defer p.mu.Unlock()
	if p.last == nil {
		p.last = make(map[incident.DeviceID]phoneFix)
	}
	old, known := p.last[f.Device]
	if !known && len(p.last) >= maxPhones {
		return
	}
	p.last[f.Device] = f
	// One position a second is what a track holds.
	if paired && (!known || f.At.Sub(old.At).Abs() >= time.Second) {
		p.fresh = append(p.fresh, f)
	}
}

// list is the last word of each, by name.
func (p *phones) list() []phoneFix {
	p.mu.Lock()
	defer p.mu.Unlock()
	list := make([]phoneFix, 0, len(p.last))
	for _, f := range p.last {
		list = append(list, f)
	}
	slices.SortFunc(list, func(a, b phoneFix) int {
		return cmp.Or(cmp.Compare(a.Name, b.Name), cmp.Compare(a.Device, b.Device))
	})
	return list
}

// take returns what has come since the last call.
func (p *phones) take() []phoneFix {
	p.mu.Lock()
	defer p.mu.Unlock()
	fresh := p.fresh
	p.fresh = nil
	return fresh
}
