package server

import (
	"fmt"
	"time"

	"github.com/google/uuid"

	"wakeback/search/incident"
	"wakeback/server/gate"
)

// ownDevice is the id as which this store's server writes, made once.
func ownDevice(docs gate.Docs) (incident.DeviceID, error) {
	const kind, name = "self", "device"
	kept, err := docs.Docs(kind)
	if err != nil {
		return "", fmt.Errorf("read the server's own id: %w", err)
	}
	if id, err := uuid.ParseBytes(kept[name]); err == nil {
		return incident.DeviceID(id.String()), nil
	}
	id, err := uuid.NewRandom()
	if err != nil {
		return "", fmt.Errorf("make the server's own id: %w", err)
	}
	if err := docs.PutDoc(kind, name, []byte(id.String())); err != nil {
		return "", fmt.Errorf("keep the server's own id: %w", err)
	}
	return incident.DeviceID(id.String()), nil
}

// readTrack reads the newest part of the vessel's track into memory.
func (s *Server) readTrack() error {
	now := s.now()
	fixes, err := s.store.Track(s.ledger.self, now.Add(-keepTrack), now.Add(time.Second))
	if err != nil {
		return fmt.Errorf("read the track: %w", err)
	}
	for _, f := range fixes {
		s.vessel.remember(f)
	}
	return nil
}
