package store

import (
	"errors"
	"fmt"
	"slices"
	"sync"
	"time"
)

// Health is whether the store still writes, and how fast.
type Health struct {
	Durable bool      // what Append acknowledges is on disk
	Problem string    // why not, in words for the crew; "" when it is
	Since   time.Time // since when not
	// TrackProblem says why positions are not recorded; marks are all the same.
	TrackProblem string
	Waiting      time.Duration // how long the commit that is under way has taken; 0 when there is none
	Commits      int           // counted since opening
	Last         time.Duration
	Median       time.Duration
	P99          time.Duration // of the newest 512 commits
}

// Health says how the store is. It never waits for the disk.
func (s *Store) Health() Health {
	h := s.status.health()
	if err := s.tracks.problem(); err != nil {
		h.TrackProblem = "Positions are not recorded (" + err.Error() + "). Marks are kept all the same."
	}
	return h
}

// words says what the matter is and what to do.
func words(err error) string {
	switch {
	case errors.Is(err, ErrDiskFull):
		return "The disk is full. New entries stay on the phones. Make room, then start the server again."
	case errors.Is(err, ErrReadOnly):
		return "The disk cannot be written to any more. New entries stay on the phones. Start the server again; if that does not help, on another disk."
	}
	return "The disk does not take what is written (" + err.Error() + "). New entries stay on the phones. Start the server again."
}

// status is whether the store writes; apart from the store's own lock, which
// is held while a disk hangs.
type status struct {
	mu      sync.Mutex
	failed  error // set once, until the store is renewed
	closed  bool
	since   time.Time
	begun   time.Time // of the commit under way
	commits int
	last    [512]time.Duration
}

// refused is why nothing can be written now.
func (s *status) refused() error {
	s.mu.Lock()
	defer s.mu.Unlock()
	switch {
	case s.closed:
		return fmt.Errorf("%w: it is closed", ErrNotDurable)
	case s.failed != nil:
		return fmt.Errorf("%w: %w", ErrNotDurable, s.failed)
	}
	return nil
}

func (s *status) begin() {
	s.mu.Lock()
	defer s.mu.Unlock()
	s.begun = time.Now() // measured, not told: the monotonic clock
}

func (s *status) end(ok bool) {
	s.mu.Lock()
	defer s.mu.Unlock()
	if ok {
		s.last[s.commits%len(s.last)] = time.Since(s.begun)
		s.commits++
	}
	s.begun = time.Time{}
}

func (s *status) fail(err error, at time.Time) {
	s.mu.Lock()
	defer s.mu.Unlock()
	s.failed, s.since = err, at
}

// renewed makes the store write again.
func (s *status) renewed() {
	s.mu.Lock()
	defer s.mu.Unlock()
	s.failed, s.since = nil, time.Time{}
}

// close reports whether it was open, and whether it wrote to the end.
func (s *status) close() (wasOpen, wrote bool) {
	s.mu.Lock()
	defer s.mu.Unlock()
	wasOpen, s.closed = !s.closed, true
	return wasOpen, s.failed == nil
}

func (s *status) health() Health {
	s.mu.Lock()
	defer s.mu.Unlock()
	h := Health{Durable: s.failed == nil && !s.closed, Since: s.since, Commits: s.commits}
	if s.failed != nil {
		h.Problem = words(s.failed)
	}
	if !s.begun.IsZero() {
		h.Waiting = time.Since(s.begun)
	}
	if n := min(s.commits, len(s.last)); n > 0 {
		h.Last = s.last[(s.commits-1)%len(s.last)]
		sorted := slices.Clone(s.last[:n])
		slices.Sort(sorted)
		h.Median, h.P99 = sorted[n/2], sorted[n*99/100]
	}
	return h
}
