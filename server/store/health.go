package store

import (
	"errors"
	"slices"
	"time"
)

// Health is whether the store still writes, and how fast.
type Health struct {
	Durable bool      // what Append acknowledges is on disk
	Problem string    // why not, in words for the crew; "" when it is
	Since   time.Time // since when not
	Commits int       // counted since opening
	Median  time.Duration
	P99     time.Duration // of the newest commits
}

// Health says how the store is.
func (s *Store) Health() Health {
	s.mu.Lock()
	defer s.mu.Unlock()
	h := Health{Durable: s.failed == nil && !s.closed, Since: s.since, Commits: s.timing.n}
	h.Median, h.P99 = s.timing.quantiles()
	if s.failed != nil {
		h.Problem = words(s.failed)
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

// timing holds how long the newest commits took.
type timing struct {
	n    int
	last [512]time.Duration
}

func (t *timing) add(d time.Duration) {
	t.last[t.n%len(t.last)] = d
	t.n++
}

func (t *timing) quantiles() (median, p99 time.Duration) {
	n := min(t.n, len(t.last))
	if n == 0 {
		return 0, 0
	}
	sorted := slices.Clone(t.last[:n])
	slices.Sort(sorted)
	return sorted[n/2], sorted[n*99/100]
}
