package server

import (
	"fmt"
	"maps"
	"slices"
	"sync"
	"time"

	"wakeback/drift/nav"
	"wakeback/search/incident"
	"wakeback/server/store"
)

// memStore is a store in memory that can be told to fail, for tests of what
// happens then; all others use the real one.
type memStore struct {
	mu     sync.Mutex // guards all below
	events []incident.Event
	docs   map[string]map[string][]byte
	tracks map[incident.DeviceID]*nav.Track
	broken bool
}

func newMemStore() *memStore {
	return &memStore{docs: map[string]map[string][]byte{}, tracks: map[incident.DeviceID]*nav.Track{}}
}

func (m *memStore) breakIt(broken bool) {
	m.mu.Lock()
	defer m.mu.Unlock()
	m.broken = broken
}

func (m *memStore) Epoch() string { return "epoch-of-memory" }

func (m *memStore) LastSeq() incident.Seq {
	m.mu.Lock()
	defer m.mu.Unlock()
	return incident.Seq(len(m.events))
}

func (m *memStore) EventsAfter(after incident.Seq, limit int) ([]incident.Event, error) {
	m.mu.Lock()
	defer m.mu.Unlock()
	rest := m.events[min(int(after), len(m.events)):]
	return slices.Clone(rest[:min(limit, len(rest))]), nil
}

func (m *memStore) Append(events []incident.Event) ([]incident.Event, error) {
	m.mu.Lock()
	defer m.mu.Unlock()
	if m.broken {
		return nil, fmt.Errorf("test: %w", store.ErrNotDurable)
	}
	out := slices.Clone(events)
	for i := range out {
		out[i].Seq = incident.Seq(len(m.events) + 1)
		out[i].ReceivedAt = time.Now().UTC()
		m.events = append(m.events, out[i])
	}
	return out, nil
}

func (m *memStore) Event(id incident.EventID) (incident.Event, bool, error) {
	m.mu.Lock()
	defer m.mu.Unlock()
	for _, e := range m.events {
		if e.ID == id {
			return e, true, nil
		}
	}
	return incident.Event{}, false, nil
}

func (m *memStore) ChainEnd(d incident.DeviceID) (uint64, string, error) {
	m.mu.Lock()
	defer m.mu.Unlock()
	for _, e := range slices.Backward(m.events) {
		if e.Device == d {
			return e.DeviceSeq, e.Hash, nil
		}
	}
	return 0, "", nil
}

func (m *memStore) PutDoc(kind, name string, doc []byte) error {
	m.mu.Lock()
	defer m.mu.Unlock()
	if m.docs[kind] == nil {
		m.docs[kind] = map[string][]byte{}
	}
	m.docs[kind][name] = slices.Clone(doc)
	return nil
}

func (m *memStore) Docs(kind string) (map[string][]byte, error) {
	m.mu.Lock()
	defer m.mu.Unlock()
	return maps.Clone(m.docs[kind]), nil
}

func (m *memStore) DeleteDoc(kind, name string) error {
	m.mu.Lock()
	defer m.mu.Unlock()
	delete(m.docs[kind], name)
	return nil
}

func (m *memStore) AppendTrack(d incident.DeviceID, fixes []nav.Fix) error {
	m.mu.Lock()
	defer m.mu.Unlock()
	if m.tracks[d] == nil {
		m.tracks[d] = &nav.Track{}
	}
	for _, f := range fixes {
		m.tracks[d].Add(f)
	}
	return nil
}

func (m *memStore) Track(d incident.DeviceID, from, to time.Time) ([]nav.Fix, error) {
	m.mu.Lock()
	defer m.mu.Unlock()
	if m.tracks[d] == nil {
		return nil, nil
	}
	return m.tracks[d].Between(from, to), nil
}

func (m *memStore) Health() Health {
	m.mu.Lock()
	defer m.mu.Unlock()
	if m.broken {
		return Health{Problem: "test: told to fail", Warnings: []string{}}
	}
	return Health{Durable: true, Warnings: []string{}}
}
