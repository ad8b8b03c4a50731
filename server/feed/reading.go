package feed

import (
	"time"

	"wakeback/drift/nav"
)

// Reading is a value as an instrument sent it, or as it follows from such
// values, with what is needed to judge it.
type Reading[T any] struct {
	Value T `json:"value"`
	// At is when it was received; of a derived value, the oldest of its inputs.
	At   time.Time `json:"at"`
	AgeS float64   `json:"age_s"`
	// Stale says that the age is past the limit of the quantity.
	Stale bool `json:"stale"`
	// Source is the feed.
	Source string `json:"source"`
	// Sentence is talker and formatter, such as "GPRMC".
	Sentence string `json:"sentence"`
	// Derived says how the value was found, when it was not sent as it stands.
	Derived string `json:"derived,omitempty"`
}

// Fresh returns the value of a reading that is there and not stale.
func Fresh[T any](r nav.Opt[Reading[T]]) nav.Opt[T] {
	if v, ok := r.Get(); ok && !v.Stale {
		return nav.Some(v.Value)
	}
	return nav.None[T]()
}

// Limits say from which age on a reading is stale. All are our choice; the
// reason stands beside each.
var (
	// Receivers send once a second or faster; five in a row must be missing.
	// At 6 kn the vessel has then gone 15 m.
	limitPosition = 5 * time.Second
	limitMotion   = 5 * time.Second
	// A small vessel with helm hard over turns 10 to 20 degrees a second, so
	// that an older heading says nothing about where the bow points.
	limitHeading = 3 * time.Second
	// Logs send every second or two, and a vessel's speed changes over tens of
	// seconds.
	limitStw = 10 * time.Second
	// Wind is averaged over minutes for drift; half a minute spans gusts.
	limitWind = 30 * time.Second
	// Tidal current changes over tens of minutes.
	limitCurrent = 2 * time.Minute
	// Water changes its temperature over miles.
	limitWater = 15 * time.Minute
	limitDepth = 10 * time.Second
	limitTime  = 10 * time.Second
	// Variation changes by less than a degree in tens of miles.
	limitVariation = time.Hour
)

// steadyFor is how long a better source must have been sending without a gap
// before it takes over again from a worse one that is fresh. Our choice: long
// enough that a loose plug does not make the arrow flicker between two sources,
// short against the minutes of a return.
const steadyFor = 10 * time.Second

// rank orders sources of one quantity; less is better. Quality comes first, then
// the order in which the feeds were given, then how directly the sentence says
// it.
type rank struct {
	quality int // 0 is best
	feed    sourceID
	kind    int
}

func (r rank) better(than rank) bool {
	if r.quality != than.quality {
		return r.quality < than.quality
	}
	if r.feed != than.feed {
		return r.feed < than.feed
	}
	return r.kind < than.kind
}

// slot holds the newest value of one quantity from one feed and kind of
// sentence.
type slot[T any] struct {
	rank     rank
	value    T
	at       time.Time
	steady   time.Time // since when values have come without a gap past the limit
	sentence string
}

// quantity holds all slots of one quantity and chooses among them.
type quantity[T any] struct {
	limit   time.Duration
	slots   []slot[T] // as many as feeds times kinds at most
	current int       // index of the chosen one; -1 before the first
}

func newQuantity[T any](limit time.Duration) quantity[T] {
	return quantity[T]{limit: limit, current: -1}
}

// put stores a value received at a moment.
func (q *quantity[T]) put(r rank, sentence string, v T, at time.Time) {
	for i := range q.slots {
		s := &q.slots[i]
		if s.rank.feed != r.feed || s.rank.kind != r.kind {
			continue
		}
		if !q.fresh(s, at) || r.quality != s.rank.quality {
			s.steady = at
		}
		s.rank, s.value, s.at, s.sentence = r, v, at, sentence
		return
	}
	q.slots = append(q.slots, slot[T]{rank: r, value: v, at: at, steady: at, sentence: sentence})
}

// fresh reports whether a slot is within the limit. One from the future (the
// clock was set back) is not.
func (q *quantity[T]) fresh(s *slot[T], now time.Time) bool {
	age := now.Sub(s.at)
	return age <= q.limit && age >= -q.limit
}

// pick chooses the slot to be used at a moment; nil before the first value.
//
// The chosen one stays until it goes stale, or until a better one has been
// steady for long enough. When all are stale it is the newest.
func (q *quantity[T]) pick(now time.Time) *slot[T] {
	if q.current >= 0 && !q.fresh(&q.slots[q.current], now) {
		q.current = -1
	}
	newest := -1
	for i := range q.slots {
		s := &q.slots[i]
		if newest < 0 || s.at.After(q.slots[newest].at) {
			newest = i
		}
		if q.fresh(s, now) && q.prefers(s, now) {
			q.current = i
		}
	}
	switch {
	case q.current >= 0:
		return &q.slots[q.current]
	case newest >= 0:
		return &q.slots[newest]
	}
	return nil
}

// prefers reports whether a fresh slot takes the place of the chosen one.
func (q *quantity[T]) prefers(s *slot[T], now time.Time) bool {
	if q.current < 0 {
		return true
	}
	cur := &q.slots[q.current]
	if !s.rank.better(cur.rank) {
		return false
	}
	sameFeed := s.rank.feed == cur.rank.feed // one feed need not prove itself again
	return sameFeed || now.Sub(s.steady) >= steadyFor
}
