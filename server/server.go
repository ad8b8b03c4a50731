package server

import (
	"context"
	"log/slog"
	"sync"
	"time"

	"github.com/gorilla/websocket"
	"github.com/labstack/echo/v4"

	"wakeback/search/incident"
	"wakeback/server/gate"
	"wakeback/server/hub"
)

// Server is the server of one vessel. All fields are set before the first
// request and not changed after; what they point to is safe for use by
// several goroutines.
type Server struct {
	cfg    Config
	log    *slog.Logger
	now    func() time.Time
	store  Store
	book   *book
	ledger *ledger
	hub    *hub.Hub
	gate   *gate.Gate
	hosts  gate.Hosts
	vessel *vessel
	phones phones
	echo   *echo.Echo
	meters *meters
	guard  *watchman
	health health

	upgrader     *websocket.Upgrader
	writeBuffers sync.Pool
	// streams ends when the streams have to.
	streams context.Context
	// changed wakes the live loop: the incidents are others than before.
	changed chan struct{}
}

// Store is what the server needs of package store.
type Store interface {
	eventStore
	hub.Source
	gate.Docs
	trackStore
	// Health says how the store is.
	Health() Health
}

// Health is how the store is, for the status page.
type Health struct {
	Durable  bool     `json:"durable"`  // acknowledged means on disk
	Problem  string   `json:"problem"`  // why not, in words for the crew; "" when durable
	Mode     string   `json:"mode"`     // how it was opened: see package store
	Warnings []string `json:"warnings"` // what was found at opening
	// How long the newest commits took.
	CommitMs    float64 `json:"commit_ms"` // the median
	CommitP99Ms float64 `json:"commit_p99_ms"`
}

// newServer puts the parts together.
func newServer(cfg Config, st Store, inst Instruments, port string) (*Server, error) {
	cfg = cfg.withDefaults()
	s := &Server{
		cfg: cfg, log: cfg.Log, now: cfg.Now, store: st, book: newBook(),
		vessel: &vessel{instruments: inst}, hosts: gate.NewHosts(port, cfg.names()...),
		streams: context.Background(), changed: make(chan struct{}, 1),
	}
	var err error
	if s.gate, err = gate.New(st, cfg.OpenPairing, s.now); err != nil {
		return nil, err
	}
	s.hub = hub.New(hub.Config{Source: st, Handler: s, Log: s.log, Now: s.now, MaxClients: cfg.MaxStreams})
	self, err := ownDevice(st)
	if err != nil {
		return nil, err
	}
	s.ledger = &ledger{store: st, book: s.book, publish: s.hub.Publish, self: self, now: s.now, log: s.log}
	if err := s.readLog(); err != nil {
		return nil, err
	}
	if err := s.readTrack(); err != nil {
		return nil, err
	}
	s.guard = newWatchman(s)
	s.upgrader = s.newUpgrader()
	s.meters = newMeters(s)
	s.echo = s.routes()
	return s, nil
}

// readLog counts what is on disk into the book.
func (s *Server) readLog() error {
	var after incident.Seq
	for {
		events, err := s.store.EventsAfter(after, maxPage)
		if err != nil {
			return err
		}
		if len(events) == 0 {
			return nil
		}
		s.book.add(events...)
		after = events[len(events)-1].Seq
	}
}

// nudge wakes the live loop.
func (s *Server) nudge() {
	select {
	case s.changed <- struct{}{}:
	default:
	}
}
