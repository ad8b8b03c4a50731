package store

import (
	"encoding/json"
	"errors"
	"fmt"
	"log/slog"
	"sync"
	"time"

	"go.etcd.io/bbolt"

	"wakeback/search/incident"
)

// Store is a folder of events, documents and tracks, open for writing by this
// process alone. It is safe for use by several goroutines.
type Store struct {
	opt   Options
	epoch string
	log   *slog.Logger

	// mu makes commits one after the other and guards all below.
	mu      sync.Mutex
	db      *bbolt.DB
	journal journal
	head    uint64 // number of the newest change
	failed  error  // set once and never cleared: the store writes no more
	since   time.Time
	closed  bool
	timing  timing

	// read guards the memory of what is on disk.
	read   sync.RWMutex
	events []incident.Event // events[i] has the number i+1
	byID   map[incident.EventID]int
	chains map[incident.DeviceID]link
	docs   map[docKey][]byte
}

// link is the end of a device's chain.
type link struct {
	seq  uint64
	hash string
}

// Epoch names the sequence of numbers: it is another when numbers begin anew.
func (s *Store) Epoch() string { return s.epoch }

// LastSeq is the newest number; 0 when there is none.
func (s *Store) LastSeq() incident.Seq {
	s.read.RLock()
	defer s.read.RUnlock()
	return incident.Seq(len(s.events))
}

// Append keeps events, all or none, and returns them with their numbers once
// they are on disk. An event that is stored already comes back as it is
// stored. Errors: *[ConflictError] for an id that is stored with other
// content, an error wrapping [incident.ErrHash] for an event whose hash is
// wrong, and [ErrNotDurable] when the store cannot write.
func (s *Store) Append(events []incident.Event) ([]incident.Event, error) {
	for _, e := range events {
		if err := e.Verify(); err != nil {
			return nil, fmt.Errorf("keep event %s: %w", e.ID, err)
		}
	}
	s.mu.Lock()
	defer s.mu.Unlock()
	out, fresh, err := s.number(events)
	if err != nil || len(fresh) == 0 {
		return out, err
	}
	payload, err := json.Marshal(fresh)
	if err != nil {
		return nil, fmt.Errorf("keep %d events: %w", len(fresh), err)
	}
	put := func(tx *bbolt.Tx) error { return putEvents(tx, fresh) }
	if err := s.commit(frame{kind: frameEvents, payload: payload}, put); err != nil {
		return nil, fmt.Errorf("keep %d events: %w", len(fresh), err)
	}
	s.remember(fresh)
	return out, nil
}

// number gives numbers to the events that are new, and finds those that are
// stored. It holds for one commit, under mu.
func (s *Store) number(events []incident.Event) (out, fresh []incident.Event, err error) {
	s.read.RLock()
	defer s.read.RUnlock()
	now := s.opt.Now().UTC().Truncate(time.Millisecond)
	mine := make(map[incident.EventID]incident.Event)
	for _, e := range events {
		old, known := mine[e.ID]
		if i, ok := s.byID[e.ID]; ok {
			old, known = s.events[i], true
		}
		switch {
		case known && old.Hash != e.Hash:
			s.keepAside(e)
			return nil, nil, &ConflictError{ID: e.ID}
		case known:
			out = append(out, old)
			continue
		}
		e.Seq = incident.Seq(len(s.events) + len(fresh) + 1)
		e.ReceivedAt = now
		mine[e.ID] = e
		fresh = append(fresh, e)
		out = append(out, e)
	}
	return out, fresh, nil
}

// keepAside keeps the other content of a stored id, for whoever looks into it.
// It is not acknowledged, so a failure here is no more than a line in the log.
func (s *Store) keepAside(e incident.Event) {
	if s.failed != nil {
		return
	}
	err := s.db.Update(func(tx *bbolt.Tx) error {
		text, err := json.Marshal(e)
		if err != nil {
			return err
		}
		return tx.Bucket(bucketAside).Put([]byte(string(e.ID)+"\x00"+e.Hash), text)
	})
	if err != nil {
		s.log.Warn("keep a conflicting event aside", "event", e.ID, "error", err)
	}
}

// commit writes one change to both logs and returns when both have it on
// disk. The two are written at the same time: if only one comes through, the
// change was not acknowledged, and opening finds and evens it out. Tracks are
// not worth a flush of the journal each: the next event's takes them along.
func (s *Store) commit(f frame, put func(*bbolt.Tx) error) error {
	switch {
	case s.closed:
		return fmt.Errorf("%w: it is closed", ErrNotDurable)
	case s.failed != nil:
		return fmt.Errorf("%w: %w", ErrNotDurable, s.failed)
	}
	begin := time.Now()
	durable := f.kind != frameTrack
	if durable {
		f.change = s.head + 1
	}
	tx, err := s.db.Begin(true)
	if err != nil {
		return s.fail(err)
	}
	err = put(tx)
	if err == nil && durable {
		err = putHead(tx, f.change)
	}
	if err != nil {
		_ = tx.Rollback()
		return s.fail(err)
	}
	journaled := make(chan error, 1)
	go func() { journaled <- s.journal.write(f, durable) }()
	err = tx.Commit()
	if err != nil {
		_ = tx.Rollback()
	}
	if err = errors.Join(err, <-journaled); err != nil {
		return s.fail(err)
	}
	if durable {
		s.head = f.change
	}
	s.timing.add(time.Since(begin))
	return nil
}

// fail ends all writing. What was told before stays readable from memory.
func (s *Store) fail(err error) error {
	s.failed = classify(err)
	s.since = s.opt.Now()
	s.log.Error("the store cannot write any more", "error", s.failed)
	return fmt.Errorf("%w: %w", ErrNotDurable, s.failed)
}

func (s *Store) remember(events []incident.Event) {
	s.read.Lock()
	defer s.read.Unlock()
	for _, e := range events {
		s.byID[e.ID] = len(s.events)
		s.events = append(s.events, e)
		if e.DeviceSeq >= s.chains[e.Device].seq {
			s.chains[e.Device] = link{e.DeviceSeq, e.Hash}
		}
	}
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

// EventsAfter returns up to limit events after a number, in order.
func (s *Store) EventsAfter(after incident.Seq, limit int) ([]incident.Event, error) {
	s.read.RLock()
	defer s.read.RUnlock()
	if int(after) >= len(s.events) || limit <= 0 {
		return nil, nil
	}
	return append([]incident.Event(nil), s.events[after:min(int(after)+limit, len(s.events))]...), nil
}

// ChainEnd is the number and the hash of a device's newest event; 0 and ""
// when it has none.
func (s *Store) ChainEnd(device incident.DeviceID) (uint64, string, error) {
	s.read.RLock()
	defer s.read.RUnlock()
	l := s.chains[device]
	return l.seq, l.hash, nil
}

// view reads the file. It takes mu only to see whether it is closed.
func (s *Store) view(fn func(*bbolt.Tx) error) error {
	s.mu.Lock()
	db, closed := s.db, s.closed
	s.mu.Unlock()
	if closed {
		return errors.New("the store is closed")
	}
	return db.View(fn)
}

// Close flushes what is open and lets go of the folder.
func (s *Store) Close() error {
	s.mu.Lock()
	defer s.mu.Unlock()
	if s.closed {
		return nil
	}
	s.closed = true
	var err error
	if s.failed == nil {
		err = s.journal.f.Sync()
	}
	return errors.Join(err, s.journal.f.Close(), s.db.Close())
}
