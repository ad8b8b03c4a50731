package server

import (
	"context"
	"errors"
	"fmt"
	"net"
	"net/http"
	"strconv"
	"sync"
	"time"

	"wakeback/server/store"
)

// How long stopping may take: requests that run, then streams. Our choice;
// what a request has written is on disk before it is answered, so that nothing
// is lost when it takes longer.
const (
	stopRequests = 5 * time.Second
	stopStreams  = 3 * time.Second
)

// Run serves until ctx ends, then stops in order: no new requests, those that
// run are finished, the streams are told and closed, the track is written, and
// the store is closed last. Errors of a configuration wrap [ErrConfig]; those
// of opening the store are package store's.
func Run(ctx context.Context, cfg Config) (err error) {
	cfg = cfg.withDefaults()
	if err := cfg.check(); err != nil {
		return err
	}
	st, report, err := store.Open(ctx, store.Options{Dir: cfg.Data, JournalDir: cfg.Journal, Log: cfg.Log, Now: cfg.Now})
	if err != nil {
		return err
	}
	defer func() {
		if closeErr := st.Close(); closeErr != nil {
			err = errors.Join(err, fmt.Errorf("close the store: %w", closeErr))
		}
	}()
	inst, err := newInstruments(cfg)
	if err != nil {
		return err
	}
	ln, err := net.Listen("tcp", cfg.Listen)
	if err != nil {
		return fmt.Errorf("listen on %s: %w", cfg.Listen, err)
	}
	defer ln.Close()
	s, err := newServer(cfg, disk{st, report}, inst, portOf(ln.Addr()))
	if err != nil {
		return err
	}
	return s.serve(ctx, ln, report.Warnings)
}

func portOf(a net.Addr) string {
	if tcp, ok := a.(*net.TCPAddr); ok {
		return strconv.Itoa(tcp.Port)
	}
	return ""
}

// serve runs all parts until ctx ends or one of them cannot go on.
func (s *Server) serve(ctx context.Context, ln net.Listener, warnings []string) error {
	ctx, cancel := context.WithCancelCause(ctx)
	defer cancel(nil)
	var parts sync.WaitGroup
	run := func(part func(context.Context)) { parts.Go(func() { part(ctx) }) }
	run(s.hub.Run)
	run(s.runLive)
	run(s.runKeeper)
	run(s.runWitness)
	run(s.guard.run)
	if r, ok := s.vessel.instruments.(interface{ Run(context.Context) error }); ok {
		run(func(ctx context.Context) {
			if err := r.Run(ctx); err != nil && ctx.Err() == nil {
				s.log.Error("instruments", "error", err) // marks work without them
			}
		})
	}
	url := s.pageURL(ln.Addr())
	admin, err := s.startAdmin(url)
	if err != nil {
		s.log.Warn("admin socket", "error", err)
		warnings = append(warnings, "Pairing and backup by command do not work: "+err.Error()+".")
	}
	h := s.httpServer()
	parts.Go(func() {
		if err := s.listen(h, ln); !errors.Is(err, http.ErrServerClosed) {
			cancel(fmt.Errorf("serve %s: %w", ln.Addr(), err))
		}
	})
	if s.cfg.Ready != nil {
		s.cfg.Ready(Ready{Addr: ln.Addr(), URL: url, Warnings: warnings})
	}
	<-ctx.Done()
	s.stop(h)
	if admin != nil {
		admin()
	}
	parts.Wait()
	if cause := context.Cause(ctx); !errors.Is(cause, context.Canceled) {
		return cause
	}
	return nil
}

func (s *Server) listen(h *http.Server, ln net.Listener) error {
	if s.cfg.TLS != nil {
		return h.ServeTLS(ln, "", "")
	}
	return h.Serve(ln)
}

// stop ends requests, then streams, so that a stream still tells what the last
// request wrote.
func (s *Server) stop(h *http.Server) {
	ctx, cancel := context.WithTimeout(context.Background(), stopRequests)
	defer cancel()
	if err := h.Shutdown(ctx); err != nil {
		s.log.Warn("stop requests", "error", err)
		_ = h.Close()
	}
	ctx, cancel = context.WithTimeout(context.Background(), stopStreams)
	defer cancel()
	if err := s.hub.Close(ctx); err != nil {
		s.log.Warn("stop streams", "error", err)
	}
}

// pageURL is where the page is: by a name that a browser on this machine
// takes for safe, where only this machine is served.
func (s *Server) pageURL(a net.Addr) string {
	scheme, host, port := "http", "localhost", portOf(a)
	if s.cfg.TLS != nil {
		scheme = "https"
		if names := s.cfg.names(); len(names) > 0 {
			host = names[0]
		}
	}
	return scheme + "://" + net.JoinHostPort(host, port)
}
