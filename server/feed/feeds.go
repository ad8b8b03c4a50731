package feed

import (
	"bufio"
	"context"
	"errors"
	"fmt"
	"io"
	"log/slog"
	"math/rand/v2"
	"sync"
	"time"

	"wakeback/drift/nav"
	"wakeback/server/feed/nmea"
)

// Config says what to listen to.
type Config struct {
	URLs []string // best first
	Now  func() time.Time
	Log  *slog.Logger
	// Variation turns a magnetic heading into a true one where no instrument
	// sent the variation.
	Variation VariationFunc
}

// Feeds are all feeds of a vessel, running. It is safe for use by several
// goroutines.
type Feeds struct {
	cfg     Config
	sources []*source
	updates chan Update

	mu      sync.Mutex // guards all below, and the counts of every source
	state   *state
	traffic *traffic
}

// source is one feed with its counts.
type source struct {
	id     sourceID
	spec   Spec
	status SourceStatus
	dec    nmea.Decoder
}

// SourceState says how a feed is.
type SourceState string

// The states of a feed.
const (
	Connecting SourceState = "connecting"
	Live       SourceState = "live"
	Silent     SourceState = "silent" // connected, and nothing came for a while
	Failed     SourceState = "failed" // see Reason; it is tried again
	Ended      SourceState = "ended"  // a recording that was replayed to its end
)

// SourceStatus is how one feed is, for the status page.
type SourceStatus struct {
	URL       string      `json:"url"`
	State     SourceState `json:"state"`
	Reason    string      `json:"reason,omitempty"`
	Good      uint64      `json:"good"`
	Checksum  uint64      `json:"bad_checksum"`
	Malformed uint64      `json:"malformed"`
	Unknown   uint64      `json:"unknown"`
	AISUnread uint64      `json:"ais_unread"` // sound sentences whose message is not read here
	LastAt    time.Time   `json:"last_at,omitzero"`
	Address   string      `json:"address,omitempty"` // where it listens, if it does
}

// silentAfter is when a feed that says nothing counts as silent. Our choice:
// the slowest instrument that matters speaks every ten seconds.
const silentAfter = 10 * time.Second

// maxUpdates is how many updates wait for a reader that is behind; the oldest
// fix gives way then, since the state holds the newest anyway.
const maxUpdates = 256

// New reads the addresses; an error wraps [ErrURL].
func New(cfg Config) (*Feeds, error) {
	if cfg.Now == nil {
		cfg.Now = time.Now
	}
	if cfg.Log == nil {
		cfg.Log = slog.New(slog.DiscardHandler)
	}
	f := &Feeds{cfg: cfg, state: newState(), traffic: newTraffic(), updates: make(chan Update, maxUpdates)}
	f.state.variation = cfg.Variation
	for i, raw := range cfg.URLs {
		spec, err := ParseURL(raw)
		if err != nil {
			return nil, err
		}
		f.sources = append(f.sources, &source{
			id: sourceID(i), spec: spec, dec: nmea.Decoder{Rule: spec.Checksum},
			status: SourceStatus{URL: raw, State: Connecting},
		})
	}
	f.state.name = func(id sourceID) string {
		if int(id) < len(f.sources) {
			return f.sources[id].spec.URL
		}
		return ""
	}
	f.state.replayed = func(id sourceID) bool {
		return int(id) < len(f.sources) && f.sources[id].spec.Kind == File
	}
	return f, nil
}

// Run listens until ctx ends. A feed that breaks off is tried again, after a
// wait that grows to some seconds.
func (f *Feeds) Run(ctx context.Context) error {
	var parts sync.WaitGroup
	for _, s := range f.sources {
		parts.Go(func() { f.listen(ctx, s) })
	}
	parts.Wait()
	return ctx.Err()
}

// The wait before a feed is tried again: doubled each time from the first to
// the last, of which a random part is taken so that several do not knock at
// once. Our choice: a plotter takes half a minute to start.
const (
	firstWait = 250 * time.Millisecond
	lastWait  = 5 * time.Second
)

func (f *Feeds) listen(ctx context.Context, s *source) {
	wait := firstWait
	for ctx.Err() == nil {
		began := f.cfg.Now()
		err := f.once(ctx, s)
		if ctx.Err() != nil {
			return
		}
		if errors.Is(err, errReplayed) {
			f.note(s, Ended, "")
			return
		}
		f.note(s, Failed, err.Error())
		f.cfg.Log.Warn("feed", "url", s.spec.URL, "error", err)
		if f.cfg.Now().Sub(began) > lastWait {
			wait = firstWait
		}
		pause := wait/2 + rand.N(wait/2+1)
		wait = min(2*wait, lastWait)
		select {
		case <-ctx.Done():
		case <-time.After(pause):
		}
	}
}

// once opens a feed and reads it until it breaks off.
func (f *Feeds) once(ctx context.Context, s *source) error {
	in, err := open(ctx, s.spec, func(addr string) {
		f.mu.Lock()
		s.status.Address = addr
		f.mu.Unlock()
	})
	if err != nil {
		return err
	}
	stop := context.AfterFunc(ctx, func() { in.Close() })
	defer stop()
	defer in.Close()
	f.note(s, Live, "")
	if s.spec.Kind == File {
		return f.replay(ctx, s, in)
	}
	err = readLines(in, func(line string) { f.take(s, line, f.cfg.Now()) })
	if err == nil {
		err = io.EOF
	}
	return fmt.Errorf("it broke off: %w", err)
}

// readLines reads lines of up to [nmea.MaxLine] bytes; of a longer one it
// hands on the beginning, which counts as malformed, and skips the rest.
func readLines(r io.Reader, line func(string)) error {
	br := bufio.NewReaderSize(r, nmea.MaxLine+1)
	for {
		text, err := br.ReadSlice('\n')
		if len(text) > 0 {
			line(string(text))
		}
		for errors.Is(err, bufio.ErrBufferFull) {
			_, err = br.ReadSlice('\n')
		}
		if err != nil {
			if errors.Is(err, io.EOF) {
				return nil
			}
			return err
		}
	}
}

func (f *Feeds) note(s *source, st SourceState, reason string) {
	f.mu.Lock()
	defer f.mu.Unlock()
	s.status.State, s.status.Reason = st, reason
}

// take counts a line and takes in what it says.
func (f *Feeds) take(s *source, line string, lineAt time.Time) {
	f.mu.Lock()
	now := f.cfg.Now()
	sentence, body, err := s.dec.Parse(line)
	s.count(err, now)
	var fix nav.Opt[nav.Fix]
	var beacon nav.Opt[Beacon]
	if err == nil {
		m := said{src: s.id, at: now, line: lineAt, sentence: sentence.Talker + sentence.Formatter}
		fix = f.state.apply(m, body)
		beacon = mobBeacon(body, now)
		if v, ok := body.(*nmea.VDM); ok {
			if beacon, err = f.traffic.hear(s.id, s.spec.URL, v, now); err != nil {
				s.status.AISUnread++
			}
		}
	}
	f.mu.Unlock()
	if fix.IsSet() {
		f.tell(Update{Kind: UpdateFix, At: now, Source: s.spec.URL, Fix: fix})
	}
	if beacon.IsSet() {
		f.tell(Update{Kind: UpdateBeacon, At: now, Source: s.spec.URL, Beacon: beacon})
	}
}

func (s *source) count(err error, now time.Time) {
	switch {
	case err == nil:
		s.status.Good++
	case errors.Is(err, nmea.ErrUnknown):
		s.status.Unknown++
	case errors.Is(err, nmea.ErrChecksum), errors.Is(err, nmea.ErrNoChecksum):
		s.status.Checksum++
		return
	default:
		s.status.Malformed++
		return
	}
	s.status.LastAt = now
}

// tell hands an update on. It never waits: for a reader that is behind the
// oldest update is dropped, unless it is a beacon's.
func (f *Feeds) tell(u Update) {
	for {
		select {
		case f.updates <- u:
			return
		default:
		}
		select {
		case old := <-f.updates:
			if old.Kind == UpdateBeacon && u.Kind != UpdateBeacon {
				u = old
			}
		default:
		}
	}
}

// Updates tells what is new, as it happens.
func (f *Feeds) Updates() <-chan Update { return f.updates }

// Vessel is all that the instruments say at a moment.
func (f *Feeds) Vessel(now time.Time) Vessel {
	f.mu.Lock()
	defer f.mu.Unlock()
	return f.state.snapshot(now)
}

// Status is how each feed is.
func (f *Feeds) Status() []SourceStatus {
	f.mu.Lock()
	defer f.mu.Unlock()
	now := f.cfg.Now()
	out := make([]SourceStatus, 0, len(f.sources))
	for _, s := range f.sources {
		st := s.status
		if st.State == Live && now.Sub(st.LastAt) > silentAfter {
			st.State = Silent
		}
		out = append(out, st)
	}
	return out
}
