package server

import (
	"errors"
	"fmt"
	"log/slog"
	"sync"
	"time"

	"github.com/google/uuid"

	"wakeback/search/incident"
	"wakeback/server/store"
)

// eventStore is what the ledger needs of the store.
type eventStore interface {
	// Append keeps events, all or none, and returns them with their numbers.
	// When it returns they are on disk. store.ErrNotDurable is wrapped when it cannot
	// write at all.
	Append(events []incident.Event) ([]incident.Event, error)
	// Event finds one event.
	Event(id incident.EventID) (incident.Event, bool, error)
	// ChainEnd is the number and the hash of a device's newest event; 0 and ""
	// when it has none.
	ChainEnd(device incident.DeviceID) (uint64, string, error)
}

// ledger is the one writer. What it acknowledges is on disk, then counted in
// the book, then published, and every event passes these in the same order.
type ledger struct {
	store   eventStore
	book    *book
	publish func(...incident.Event) error
	self    incident.DeviceID // as whom the server writes
	now     func() time.Time
	log     *slog.Logger

	// mu makes the order: held from the decision what to write until it is
	// published, so across one commit.
	mu sync.Mutex
}

// writing is one commit in the making. It lives while the ledger's mu is held.
type writing struct {
	l      *ledger
	events []incident.Event
	chain  uint64 // number and hash of the server's newest event
	hash   string
	linked bool // chain and hash were read
}

// write makes one commit: fn says what to write, and either all of it is kept
// or nothing. It returns what was kept, with its numbers. When the store
// cannot write, the events are still counted in the book, so that guidance
// goes on from memory, and the error wraps store.ErrNotDurable.
func (l *ledger) write(fn func(w *writing) error) ([]incident.Event, error) {
	l.mu.Lock()
	defer l.mu.Unlock()
	w := &writing{l: l}
	if err := fn(w); err != nil || len(w.events) == 0 {
		return nil, err
	}
	kept, err := l.store.Append(w.events)
	if err != nil {
		if errors.Is(err, store.ErrNotDurable) {
			l.book.add(w.events...)
		}
		return nil, fmt.Errorf("keep %d events: %w", len(w.events), err)
	}
	l.book.add(kept...)
	if err := l.publish(kept...); err != nil {
		l.log.Error("publish", "error", err) // clients find the events when they come back
	}
	return kept, nil
}

// find returns an event that is on disk.
func (w *writing) find(id incident.EventID) (incident.Event, bool, error) {
	return w.l.store.Event(id)
}

// add takes events of another device. One that is in the log already is left
// out; with other content it is refused.
func (w *writing) add(events ...incident.Event) error {
	for i, e := range events {
		old, ok, err := w.find(e.ID)
		switch {
		case err != nil:
			return fmt.Errorf("look for event %s: %w", e.ID, err)
		case ok && old.Hash == e.Hash:
			continue
		case ok:
			return &fieldIn{prefix: fmt.Sprintf("events[%d].", i), err: errConflict}
		}
		w.events = append(w.events, e)
	}
	return nil
}

// author writes an event of the server's own. An empty id makes one.
func (w *writing) author(draft incident.Event, kind incident.Kind, body any) (incident.Event, error) {
	if err := w.link(); err != nil {
		return incident.Event{}, err
	}
	if draft.ID == "" {
		id, err := uuid.NewV7()
		if err != nil {
			return incident.Event{}, fmt.Errorf("name an event: %w", err)
		}
		draft.ID = incident.EventID(id.String())
	}
	if draft.DeviceAt.IsZero() {
		draft.DeviceAt = draft.At
	}
	draft.Device, draft.DeviceSeq, draft.PrevHash = w.l.self, w.chain+1, w.hash
	e, err := incident.New(draft, kind, body)
	if err == nil {
		err = e.Validate()
	}
	if err != nil {
		return incident.Event{}, err
	}
	w.chain, w.hash = e.DeviceSeq, e.Hash
	w.events = append(w.events, e)
	return e, nil
}

// link finds the end of the server's own chain, once in a commit.
func (w *writing) link() error {
	if w.linked {
		return nil
	}
	seq, hash, err := w.l.store.ChainEnd(w.l.self)
	if err != nil {
		return fmt.Errorf("find the end of the server's own events: %w", err)
	}
	w.chain, w.hash, w.linked = seq, hash, true
	return nil
}

// openFor is the incident that a mark joins, with its state.
func (w *writing) openFor(drill bool) (incident.State, bool) {
	states := w.l.book.states()
	id, ok := incident.OpenAt(states, drill)
	if !ok {
		return incident.State{}, false
	}
	for _, s := range states {
		if s.ID == id {
			return s, true
		}
	}
	return incident.State{}, false
}
