package store

import (
	"encoding/json"
	"errors"
	"fmt"
	"time"

	"go.etcd.io/bbolt"

	"wakeback/search/incident"
)

// Append keeps events, all or none, and returns them with their numbers once
// they are on disk. An event that is stored already comes back as it is
// stored. An event that does not fit its device's chain is kept all the same:
// see [Store.Findings]. Errors: *[ConflictError] for an id that is stored with
// other content, an error wrapping [incident.ErrHash] for an event whose hash
// is wrong, and [ErrNotDurable] when the store cannot write.
func (s *Store) Append(events []incident.Event) ([]incident.Event, error) {
	for _, e := range events {
		if err := e.Verify(); err != nil {
			return nil, fmt.Errorf("keep event %s: %w", e.ID, err)
		}
	}
	s.mu.Lock()
	defer s.mu.Unlock()
	out, fresh, err := s.number(events)
	if other := (*conflict)(nil); errors.As(err, &other) {
		s.keepConflict(other.event)
		return nil, &ConflictError{ID: other.event.ID}
	}
	if err != nil || len(fresh) == 0 {
		return out, err
	}
	f, err := eventsFrame(frameEvents, s.head+1, fresh)
	if err != nil {
		return nil, fmt.Errorf("keep %d events: %w", len(fresh), err)
	}
	if len(f.payload) > maxFrame {
		return nil, fmt.Errorf("keep %d events: %d bytes are more than one commit holds", len(fresh), len(f.payload))
	}
	if err := s.commit(f, func(tx *bbolt.Tx) error { return putEvents(tx, fresh) }); err != nil {
		return nil, fmt.Errorf("keep %d events: %w", len(fresh), err)
	}
	s.remember(fresh)
	return out, nil
}

// conflict is an event whose id is taken.
type conflict struct{ event incident.Event }

func (c *conflict) Error() string {
	return "event " + string(c.event.ID) + " is there with other content"
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
			return nil, nil, &conflict{e}
		case known:
			out = append(out, old)
			continue
		}
		e.Seq, e.ReceivedAt = incident.Seq(len(s.events)+len(fresh)+1), now
		e.Body = append(json.RawMessage(nil), e.Body...) // the caller's bytes may change
		mine[e.ID] = e
		fresh = append(fresh, e)
		out = append(out, e)
	}
	return out, fresh, nil
}

// mostConflicts bounds what is kept: one phone that goes wrong must not fill the
// disk. Our choice.
const mostConflicts = 1000

// keepConflict keeps the other content of a stored id. It is refused all the
// same, so that a failure here is told by the next Append.
func (s *Store) keepConflict(e incident.Event) {
	e.Seq, e.ReceivedAt = 0, s.opt.Now().UTC().Truncate(time.Millisecond)
	had := len(s.conflicts)
	im := image{conflicts: s.conflicts}
	im.addConflicts(e)
	if len(im.conflicts) == had || had >= mostConflicts || len(e.ID) > longestName {
		return
	}
	one := im.conflicts[had:]
	f, err := eventsFrame(frameConflict, s.head+1, one)
	if err == nil {
		err = s.commit(f, func(tx *bbolt.Tx) error { return putConflicts(tx, one) })
	}
	if err != nil {
		s.log.Warn("keep a conflicting event aside", "event", e.ID, "error", err)
		return
	}
	s.read.Lock()
	s.conflicts = im.conflicts
	s.read.Unlock()
}

// commit writes one change to both logs, at the same time, and returns when
// both have it on disk. If only one comes through, the change was not
// acknowledged, and opening puts it into the other.
func (s *Store) commit(f frame, put func(*bbolt.Tx) error) error {
	if err := s.status.refused(); err != nil {
		return err
	}
	s.status.begin()
	var journaled chan error
	err := guarded(func() error {
		return s.db.Update(func(tx *bbolt.Tx) error {
			if err := errors.Join(put(tx), putHead(tx, f.change)); err != nil {
				return err
			}
			journaled = make(chan error, 1)
			go func() { journaled <- s.journal.write(f, true) }()
			return nil // and now the file is flushed
		})
	})
	if journaled != nil {
		err = errors.Join(err, <-journaled)
	}
	s.status.end(err == nil)
	if err != nil {
		return s.fail(err)
	}
	s.read.Lock()
	s.head = f.change
	s.read.Unlock()
	return nil
}

// fail ends all writing. What was acknowledged stays readable from memory.
func (s *Store) fail(err error) error {
	err = classify(err)
	s.status.fail(err, s.opt.Now())
	s.log.Error("the store cannot write any more", "error", err)
	if !errors.Is(err, ErrDiskFull) && !errors.Is(err, ErrReadOnly) {
		s.markFailed()
	}
	return fmt.Errorf("%w: %w", ErrNotDurable, err)
}
