package store

import (
	"log/slog"
	"slices"
	"sync"

	"go.etcd.io/bbolt"

	"wakeback/search/incident"
)

// Store is a folder of events, documents and tracks, open for writing by this
// process alone. It is safe for use by several goroutines. Reading never
// waits for the disk, but for the reading of tracks.
type Store struct {
	opt    Options
	epoch  string
	log    *slog.Logger
	locks  []*lock
	tracks *tracks

	// mu makes commits one after the other, and guards what they use.
	mu      sync.Mutex
	db      *bbolt.DB // nil when the disk could not be written to at opening
	journal journal

	status status

	// read guards the memory of what is on disk.
	read      sync.RWMutex
	head      uint64           // number of the newest change; written under mu as well
	events    []incident.Event // events[i] has the number i+1; only appended to
	byID      map[incident.EventID]int
	chains    map[incident.DeviceID]*chainOf
	docs      map[docKey][]byte
	conflicts []incident.Event
}

// load takes an image into memory.
func (s *Store) load(im image) {
	s.byID = make(map[incident.EventID]int, len(im.events))
	s.chains = make(map[incident.DeviceID]*chainOf)
	s.docs, s.head, s.conflicts = im.docs, im.head, im.conflicts
	s.remember(im.events)
}

// image is a copy of what is in memory: what was acknowledged.
func (s *Store) image() image {
	s.read.RLock()
	defer s.read.RUnlock()
	im := image{epoch: s.epoch, head: s.head, docs: make(map[docKey][]byte, len(s.docs))}
	im.events, im.conflicts = slices.Clone(s.events), slices.Clone(s.conflicts)
	for k, doc := range s.docs {
		im.docs[k] = doc // never changed in place
	}
	return im
}

func (s *Store) remember(events []incident.Event) {
	s.read.Lock()
	defer s.read.Unlock()
	for _, e := range events {
		i := len(s.events)
		s.byID[e.ID] = i
		s.events = append(s.events, e)
		c := s.chains[e.Device]
		if c == nil {
			c = &chainOf{first: make(map[uint64]int)}
			s.chains[e.Device] = c
		}
		c.add(e.DeviceSeq, i)
	}
}

// Epoch names the sequence of numbers: it is another when numbers begin anew.
func (s *Store) Epoch() string { return s.epoch }

// LastSeq is the newest number; 0 when there is none.
func (s *Store) LastSeq() incident.Seq {
	s.read.RLock()
	defer s.read.RUnlock()
	return incident.Seq(len(s.events))
}

// Event finds one event.
func (s *Store) Event(id incident.EventID) (incident.Event, bool, error) {
	s.read.RLock()
	defer s.read.RUnlock()
	i, ok := s.byID[id]
	if !ok {
		return incident.Event{}, false, nil
	}
	return s.events[i], true, nil
}

// EventsAfter returns up to limit events after a number, in order. Their
// bodies are shared and not to be written to.
func (s *Store) EventsAfter(after incident.Seq, limit int) ([]incident.Event, error) {
	s.read.RLock()
	defer s.read.RUnlock()
	if after >= incident.Seq(len(s.events)) || limit <= 0 {
		return nil, nil
	}
	rest := s.events[after:]
	return slices.Clone(rest[:min(limit, len(rest))]), nil
}

// Conflicts are the events that were refused with a [ConflictError], as they
// came, for whoever looks into it.
func (s *Store) Conflicts() []incident.Event {
	s.read.RLock()
	defer s.read.RUnlock()
	return slices.Clone(s.conflicts)
}
