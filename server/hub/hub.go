package hub

import (
	"cmp"
	"context"
	"encoding/json"
	"errors"
	"fmt"
	"log/slog"
	"slices"
	"sync"
	"sync/atomic"
	"time"

	"github.com/gorilla/websocket"
	"golang.org/x/time/rate"

	"wakeback/search/incident"
)

// Queue is how many events the hub holds, and so how far a live client may
// fall behind. Our choice: an incident has hundreds of events in hours.
const Queue = 256

// Source is where older events come from: the store.
type Source interface {
	// Epoch names the store: it changes when the sequence starts anew.
	Epoch() string
	// LastSeq is the newest number given out; 0 when there is none.
	LastSeq() incident.Seq
	// EventsAfter returns up to limit events after a number, in order.
	EventsAfter(after incident.Seq, limit int) ([]incident.Event, error)
}

// Config is what a hub needs. Zero limits mean the default beside them.
type Config struct {
	Source  Source
	Handler Handler
	Log     *slog.Logger
	Now     func() time.Time // time.Now when nil

	MaxClients   int // in all; 64
	MaxPerDevice int // 3: a page, the one it replaces, and a script
	Limits       Limits
}

// Limits are the times and sizes of a connection.
type Limits struct {
	Ping      time.Duration // 5 s
	ReadWait  time.Duration // 12 s: two pings and a bit; a boat's network, not the internet
	WriteWait time.Duration // 3 s
	ReadBytes int64         // 16 KiB
	// Rate and Burst bound the messages of one device. A device above it is
	// read more slowly; nothing it says is dropped.
	Rate  rate.Limit // 20 a second
	Burst int        // 40
}

func (c Config) withDefaults() Config {
	c.MaxClients = cmp.Or(c.MaxClients, 64)
	c.MaxPerDevice = cmp.Or(c.MaxPerDevice, 3)
	l := &c.Limits
	l.Ping = cmp.Or(l.Ping, 5*time.Second)
	l.ReadWait = cmp.Or(l.ReadWait, 12*time.Second)
	l.WriteWait = cmp.Or(l.WriteWait, 3*time.Second)
	l.ReadBytes = cmp.Or(l.ReadBytes, 16<<10)
	l.Rate = cmp.Or(l.Rate, 20)
	l.Burst = cmp.Or(l.Burst, 40)
	if c.Now == nil {
		c.Now = time.Now
	}
	if c.Log == nil {
		c.Log = slog.New(slog.DiscardHandler)
	}
	return c
}

// Why a client is not taken.
var (
	ErrFull       = errors.New("too many connections")
	ErrFullDevice = errors.New("too many connections of one device")
	ErrClosed     = errors.New("the server is stopping")
)

// Hub is safe for use by several goroutines.
type Hub struct {
	cfg Config

	// mu guards all below. It is held for memory work only, never while
	// something is written, read from the store or waited for.
	mu      sync.Mutex
	ring    [Queue]*websocket.PreparedMessage // of event n at n % Queue
	oldest  incident.Seq                      // first event in ring; last+1 when it is empty
	last    incident.Seq                      // newest event published
	slots   []slot                            // the state lane, few and fixed in order
	version uint64                            // of the newest slot
	clients map[*Client]struct{}
	devices map[incident.DeviceID]*device
	closed  bool

	running sync.WaitGroup // one for each client in Serve

	resyncs, failures, sent atomic.Uint64
}

// slot is one newest word of the state lane.
type slot struct {
	key     string
	version uint64
	message *websocket.PreparedMessage
}

// device is what connections of one device share.
type device struct {
	clients int
	limit   *rate.Limiter
}

// New makes a hub that begins at the end of the source.
func New(cfg Config) *Hub {
	last := cfg.Source.LastSeq()
	return &Hub{
		cfg: cfg.withDefaults(), last: last, oldest: last + 1,
		clients: make(map[*Client]struct{}), devices: make(map[incident.DeviceID]*device),
	}
}

// Publish hands out events that are on disk. The caller gives them in order
// of their numbers; one that was published already is passed over. Where
// numbers were left out, clients are led back to the source for them.
func (h *Hub) Publish(events ...incident.Event) error {
	messages := make([]*websocket.PreparedMessage, len(events))
	for i, e := range events {
		m, err := prepare(eventMessage{T: "event", Event: e})
		if err != nil {
			return fmt.Errorf("publish event %s: %w", e.ID, err)
		}
		messages[i] = m
	}
	h.mu.Lock()
	defer h.mu.Unlock()
	for i, e := range events {
		h.push(e.Seq, messages[i])
	}
	h.wakeAll()
	return nil
}

// push puts one event at the end of the ring. Needs mu.
func (h *Hub) push(seq incident.Seq, m *websocket.PreparedMessage) {
	if seq <= h.last {
		return
	}
	if seq != h.last+1 {
		h.oldest = seq // the ring starts anew: what lies before is in the source
	}
	h.ring[seq%Queue] = m
	h.last = seq
	if h.last-h.oldest >= Queue {
		h.oldest = h.last - Queue + 1
	}
}

// Word is the newest word about one thing.
type Word struct {
	Key     string // what it is about; a later word of the same key replaces it
	Message any    // marshalled once, for all
}

// Show replaces the newest words about things and tells everyone.
func (h *Hub) Show(words ...Word) error {
	slots := make([]slot, len(words))
	for i, w := range words {
		m, err := prepare(w.Message)
		if err != nil {
			return fmt.Errorf("show %s: %w", w.Key, err)
		}
		slots[i] = slot{key: w.Key, message: m}
	}
	h.mu.Lock()
	defer h.mu.Unlock()
	for _, s := range slots {
		h.version++
		s.version = h.version
		if i := h.slotIndex(s.key); i >= 0 {
			h.slots[i] = s
		} else {
			h.slots = append(h.slots, s)
		}
	}
	h.wakeAll()
	return nil
}

// Forget takes a word back: clients that come from now on do not hear it.
func (h *Hub) Forget(keys ...string) {
	h.mu.Lock()
	defer h.mu.Unlock()
	h.slots = slices.DeleteFunc(h.slots, func(s slot) bool { return slices.Contains(keys, s.key) })
}

func (h *Hub) slotIndex(key string) int {
	return slices.IndexFunc(h.slots, func(s slot) bool { return s.key == key })
}

// wakeAll tells the writers that there is something. Needs mu.
func (h *Hub) wakeAll() {
	for c := range h.clients {
		c.wakeUp()
	}
}

// Run sends the tick once a second until ctx ends: a page that hears none for
// three seconds knows that what it shows is old.
func (h *Hub) Run(ctx context.Context) {
	ticker := time.NewTicker(time.Second)
	defer ticker.Stop()
	for {
		h.Tick()
		select {
		case <-ctx.Done():
			return
		case <-ticker.C:
		}
	}
}

// Tick sends one tick.
func (h *Hub) Tick() {
	h.mu.Lock()
	t := tickMessage{T: "tick", At: h.cfg.Now().UTC(), Seq: h.last, Clients: len(h.clients)}
	h.mu.Unlock()
	if err := h.Show(Word{"tick", t}); err != nil {
		h.cfg.Log.Error("tick", "error", err)
	}
}

// CloseDevice closes every connection of a device, now: it was revoked.
func (h *Hub) CloseDevice(d incident.DeviceID, reason string) {
	h.mu.Lock()
	defer h.mu.Unlock()
	for c := range h.clients {
		if c.info.Device == d {
			c.end(CloseRevoked, reason)
		}
	}
}

// Close ends all connections with the code for a server that goes away, after
// what they still have to get, and waits for them until ctx ends.
func (h *Hub) Close(ctx context.Context) error {
	h.mu.Lock()
	h.closed = true
	for c := range h.clients {
		c.end(websocket.CloseGoingAway, "the server is stopping")
	}
	h.mu.Unlock()
	done := make(chan struct{})
	go func() { h.running.Wait(); close(done) }()
	select {
	case <-done:
		return nil
	case <-ctx.Done():
		h.mu.Lock()
		for c := range h.clients {
			_ = c.conn.Close()
		}
		h.mu.Unlock()
		<-done // a closed connection ends both its goroutines
		return fmt.Errorf("close the streams: %w", ctx.Err())
	}
}

// Stats are figures for the status page.
type Stats struct {
	Clients  int    `json:"clients"`
	Devices  int    `json:"devices"`
	Resyncs  uint64 `json:"resyncs"`  // closed because they fell behind
	Failures uint64 `json:"failures"` // closed because a write failed
	Sent     uint64 `json:"sent"`     // messages
}

// Stats returns the figures now.
func (h *Hub) Stats() Stats {
	h.mu.Lock()
	defer h.mu.Unlock()
	return Stats{
		Clients: len(h.clients), Devices: len(h.devices),
		Resyncs: h.resyncs.Load(), Failures: h.failures.Load(), Sent: h.sent.Load(),
	}
}

// Connected lists who listens, by name.
func (h *Hub) Connected() []Info {
	h.mu.Lock()
	defer h.mu.Unlock()
	list := make([]Info, 0, len(h.clients))
	for c := range h.clients {
		list = append(list, c.info)
	}
	slices.SortFunc(list, func(a, b Info) int {
		return cmp.Or(cmp.Compare(a.Name, b.Name), cmp.Compare(a.Device, b.Device))
	})
	return list
}

func prepare(v any) (*websocket.PreparedMessage, error) {
	text, err := json.Marshal(v)
	if err != nil {
		return nil, err
	}
	return websocket.NewPreparedMessage(websocket.TextMessage, text)
}
