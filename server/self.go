package server

import (
	"encoding/json"
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
	var id uuid.UUID
	if doc, ok := kept[name]; ok {
		if err := json.Unmarshal(doc, &id); err != nil {
			return "", fmt.Errorf("read the server's own id: %w", err)
		}
		return incident.DeviceID(id.String()), nil
	}
	if id, err = uuid.NewRandom(); err != nil {
		return "", fmt.Errorf("make the server's own id: %w", err)
	}
	doc, err := json.Marshal(id)
	if err != nil {
		return "", fmt.Errorf("write the server's own id: %w", err)
	}
	if err := docs.PutDoc(kind, name, doc); err != nil {
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
	s.vessel.load(fixes)
	return nil
}
