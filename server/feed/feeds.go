package feed

import (
	"bufio"
	"context"
	"errors"
	"fmt"
	"io"
	"log/slog"
	"math/rand/v2"
	"strconv"
	"strings"
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
	// Record is where all that is said is written; without a path nowhere.
	Record RecordConfig
	// MaxKn is the speed over which a position is a jump that the vessel cannot
	// have made; 0 means 60.
	MaxKn float64
	// AllowSimulated takes positions that an instrument itself calls simulated
	// or typed in, for training ashore.
	AllowSimulated bool
}

// Feeds are all feeds of a vessel, running. It is safe for use by several
// goroutines.
type Feeds struct {
	cfg     Config
	sources []*source
	updates *queue
	record  *recorder // nil when nothing is recorded

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
	// LastError says, for a person, why the newest line that was refused was
	// refused; LastBad is that line, cut and made printable.
	LastError string `json:"last_error,omitempty"`
	LastBad   string `json:"last_bad,omitempty"`
	Address   string `json:"address,omitempty"` // where it listens, if it does
}

// silentAfter is when a feed that says nothing counts as silent. Our choice:
// the slowest instrument that matters speaks every ten seconds.
const silentAfter = 10 * time.Second

// subFeeds is how many feeds within a recording are told apart, and thereby the
// step between the identities of two feeds.
const subFeeds = 16

// New reads the addresses, and opens the recording. An error about an address
// wraps [ErrURL].
func New(cfg Config) (*Feeds, error) {
	if cfg.Now == nil {
		cfg.Now = time.Now
	}
	if cfg.Log == nil {
		cfg.Log = slog.New(slog.DiscardHandler)
	}
	f := &Feeds{cfg: cfg, state: newState(), traffic: newTraffic(), updates: newQueue()}
	f.state.variation, f.state.allowSimulated = cfg.Variation, cfg.AllowSimulated
	if cfg.MaxKn < 0 {
		return nil, fmt.Errorf("feeds: greatest speed is %g kn, expected 0 or more", cfg.MaxKn)
	}
	if cfg.MaxKn > 0 {
		f.state.maxKn = cfg.MaxKn
	}
	for i, raw := range cfg.URLs {
		spec, err := ParseURL(raw)
		if err != nil {
			return nil, err
		}
		f.sources = append(f.sources, &source{
			id: sourceID(i * subFeeds), spec: spec, dec: nmea.Decoder{Rule: spec.Checksum},
			status: SourceStatus{URL: raw, State: Connecting},
		})
	}
	f.state.name = f.nameOf
	f.state.replayed = func(id sourceID) bool {
		return int(id)/subFeeds < len(f.sources) && f.sources[int(id)/subFeeds].spec.Kind == File
	}
	var err error
	f.record, err = newRecorder(cfg.Record)
	return f, err
}

// nameOf is the address of a feed, with the number of the feed within a
// recording.
func (f *Feeds) nameOf(id sourceID) string {
	if int(id)/subFeeds >= len(f.sources) {
		return "injected"
	}
	name := f.sources[int(id)/subFeeds].spec.URL
	if sub := int(id) % subFeeds; sub > 0 {
		name += "#" + strconv.Itoa(sub)
	}
	return name
}

// Run listens until ctx ends. A feed that breaks off is tried again, after a
// wait that grows to some seconds. When Run returns every goroutine that it
// started has ended and the channel of updates is closed. It may be called once.
func (f *Feeds) Run(ctx context.Context) error {
	var parts sync.WaitGroup
	parts.Go(func() { f.updates.pump(ctx) })
	if f.record != nil {
		parts.Go(func() {
			if err := f.record.run(ctx); err != nil {
				f.cfg.Log.Error("recording", "error", err)
			}
		})
	}
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
		p := player{pace: s.spec.Pace, now: f.cfg.Now, say: func(h heard) { f.take(s, h) }}
		return p.all(ctx, in, s.spec.Checksum)
	}
	err = readLines(in, func(line string) {
		now := f.cfg.Now()
		f.take(s, heard{text: line, at: now, line: now})
	})
	if err == nil {
		err = io.EOF
	}
	return fmt.Errorf("it broke off: %w", err)
}

// readLines reads lines of up to [nmea.MaxLine] bytes; of a longer one it
// hands on the beginning, which counts as malformed, and skips the rest. What
// stands at the end without a line end is half a line and is dropped: a talker
// without checksums would otherwise have half a number believed.
func readLines(r io.Reader, line func(string)) error {
	br := bufio.NewReaderSize(r, nmea.MaxLine+1)
	for {
		text, err := br.ReadSlice('\n')
		if err == nil || errors.Is(err, bufio.ErrBufferFull) {
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

// take counts a line, records it and takes in what it says.
func (f *Feeds) take(s *source, h heard) {
	text := strings.TrimRight(h.text, "\r\n")
	f.mu.Lock()
	defer f.mu.Unlock()
	if s.spec.Kind != File { // a recording is not recorded again
		f.record.write(h.at, int(s.id)/subFeeds+1, text)
	}
	sentence, body, err := s.dec.Parse(text)
	s.count(text, err, f.cfg.Now())
	if err != nil {
		return
	}
	m := said{src: s.id + sourceID(h.sub), at: h.at, line: h.line, sentence: sentence.Talker + sentence.Formatter}
	if fix := f.state.apply(m, body); fix.IsSet() {
		f.updates.put(Update{Kind: UpdateFix, At: h.at, Source: f.nameOf(m.src), Fix: fix})
	}
	beacon := mobBeacon(body, h.at)
	if v, ok := body.(*nmea.VDM); ok {
		if beacon, err = f.traffic.hear(m.src, f.nameOf(m.src), v, h.at); err != nil {
			s.status.AISUnread++
		}
	}
	if beacon.IsSet() {
		f.updates.put(Update{Kind: UpdateBeacon, At: h.at, Source: f.nameOf(m.src), Beacon: beacon})
	}
}

func (s *source) count(line string, err error, now time.Time) {
	switch {
	case err == nil:
		s.status.Good++
	case errors.Is(err, nmea.ErrUnknown):
		s.status.Unknown++
	case errors.Is(err, nmea.ErrChecksum), errors.Is(err, nmea.ErrNoChecksum):
		s.status.Checksum++
		s.status.LastError, s.status.LastBad = err.Error(), printable(line)
		return
	default:
		s.status.Malformed++
		s.status.LastError, s.status.LastBad = err.Error(), printable(line)
		return
	}
	s.status.LastAt = now
}

// printable makes a line fit for a screen or a log.
func printable(line string) string {
	b := []byte(line[:min(len(line), 100)])
	for i, c := range b {
		if c < ' ' || c > '~' {
			b[i] = '?'
		}
	}
	return string(b)
}

// Updates tells what is new, as it happens. A reader that is behind gets the
// newest fixes and the newest report of each beacon. The channel is closed when
// Run returns.
func (f *Feeds) Updates() <-chan Update { return f.updates.out }

// Recording is how the recording is; absent when nothing is recorded.
func (f *Feeds) Recording() nav.Opt[RecordStatus] {
	if f.record == nil {
		return nav.None[RecordStatus]()
	}
	return nav.Some(f.record.state())
}

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
