package server

import (
	"context"
	"time"

	"wakeback/drift/nav"
	"wakeback/search/incident"
)

// The track goes to disk in batches, because each costs a flush and a memory
// card has only so many. What a power cut can take of the track is this much;
// marks and events are never batched. Our choice.
const (
	calmFlush = 10 * time.Second
	liveFlush = 2 * time.Second
)

// trackStore keeps tracks: the vessel's under the server's own device, and
// each phone's.
type trackStore interface {
	AppendTrack(device incident.DeviceID, fixes []nav.Fix) error
	Track(device incident.DeviceID, from, to time.Time) ([]nav.Fix, error)
}

// keeper writes the tracks and looks after the store's health. It is apart
// from the live loop, because it waits for the disk.
type keeper struct {
	s       *Server
	flushed time.Time
}

func (s *Server) runKeeper(ctx context.Context) {
	k := &keeper{s: s, flushed: s.now()}
	ticker := time.NewTicker(time.Second)
	defer ticker.Stop()
	for {
		select {
		case <-ctx.Done():
			k.flush()
			return
		case <-ticker.C:
			k.look(s.now())
		}
	}
}

func (k *keeper) look(now time.Time) {
	every := calmFlush
	if len(k.s.book.live()) > 0 {
		every = liveFlush
	}
	if now.Sub(k.flushed).Abs() >= every {
		k.flush()
		k.flushed = now
	}
	k.s.showHealth()
}

// flush writes what is not on disk of the tracks. What cannot be written now
// is tried again.
func (k *keeper) flush() {
	fixes := k.s.vessel.pending()
	if len(fixes) > 0 {
		if err := k.s.store.AppendTrack(k.s.ledger.self, fixes); err != nil {
			k.s.vessel.putBack(fixes)
			k.s.log.Warn("write the track", "error", err)
		}
	}
	byPhone := make(map[incident.DeviceID][]nav.Fix)
	for _, f := range k.s.phones.take() {
		byPhone[f.Device] = append(byPhone[f.Device], f.fix())
	}
	for device, fixes := range byPhone {
		if err := k.s.store.AppendTrack(device, fixes); err != nil {
			k.s.log.Warn("write the track of a phone", "device", string(device), "error", err)
		}
	}
}
