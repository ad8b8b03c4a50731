package server

import (
	"bytes"
	"context"
	"encoding/json"
	"errors"
	"fmt"
	"net"
	"net/http"
	"os"
	"path/filepath"
	"time"

	"github.com/labstack/echo/v4"

	"wakeback/server/gate"
)

// The admin socket is a file in the data folder, for this machine's commands:
// who may read the folder may pair.

// socketName is the file; socketMax the longest path that the system takes for
// one (108 bytes with the closing zero on Linux, 104 elsewhere: sys/un.h).
const (
	socketName = "admin.sock"
	socketMax  = 103
)

// PairLink is a one-time link for a new device.
type PairLink struct {
	Code      string    `json:"code"`
	URL       string    `json:"url"`
	Role      gate.Role `json:"role"`
	ExpiresAt time.Time `json:"expires_at"`
}

// ErrNotRunning is wrapped when no server runs on a data folder.
var ErrNotRunning = errors.New("no server is running on this data folder")

// startAdmin serves the admin socket, and returns what ends it.
func (s *Server) startAdmin(url string) (func(), error) {
	path := filepath.Join(s.cfg.Data, socketName)
	if len(path) > socketMax {
		return nil, fmt.Errorf("the path of the data folder is too long for a socket: %s", path)
	}
	// The store is locked by this process, so what lies here is left over.
	if err := os.Remove(path); err != nil && !errors.Is(err, os.ErrNotExist) {
		return nil, fmt.Errorf("remove the old socket: %w", err)
	}
	ln, err := net.Listen("unix", path)
	if err != nil {
		return nil, fmt.Errorf("open the admin socket: %w", err)
	}
	if err := os.Chmod(path, 0o600); err != nil {
		ln.Close()
		return nil, fmt.Errorf("close the admin socket to others: %w", err)
	}
	e := echo.New()
	e.HTTPErrorHandler = s.sendProblem
	e.POST("/pair", func(c echo.Context) error { return s.adminPair(c, url) })
	e.POST("/backup", s.adminBackup)
	h := &http.Server{Handler: e, ReadHeaderTimeout: 5 * time.Second, MaxHeaderBytes: 16 << 10, ErrorLog: newErrorLog(s.log)}
	done := make(chan struct{})
	go func() {
		defer close(done)
		if err := h.Serve(ln); !errors.Is(err, http.ErrServerClosed) {
			s.log.Error("admin socket", "error", err)
		}
	}()
	return func() { _ = h.Close(); <-done }, nil
}

func (s *Server) adminPair(c echo.Context, url string) error {
	o, err := readBody(c.Response(), c.Request())
	if err != nil {
		return err
	}
	role := gate.Crew
	r := &reader{o: o}
	take(r, "role", "watch, crew or skipper", &role)
	if r.err != nil {
		return r.err
	}
	code, err := s.gate.NewCode(role)
	if err != nil {
		return err
	}
	// Behind the #, so that no server and no proxy sees the code.
	return c.JSON(http.StatusCreated, PairLink{Code: code.Code, URL: url + "/#pair=" + code.Code, Role: role, ExpiresAt: code.ExpiresAt})
}

// backuper is a store that can be copied while it runs.
type backuper interface{ Backup(path string) error }

func (s *Server) adminBackup(c echo.Context) error {
	o, err := readBody(c.Response(), c.Request())
	if err != nil {
		return err
	}
	var path string
	r := &reader{o: o}
	need(r, "path", "the path of the file to write", &path)
	if r.err == nil && !filepath.IsAbs(path) {
		r.err = fieldError("path", "a path from the root", nil)
	}
	if r.err != nil {
		return r.err
	}
	b, ok := s.store.(backuper)
	if !ok {
		return pNotFound.problem("This store cannot be backed up.")
	}
	if err := b.Backup(path); err != nil {
		return pNotSaved.because(err, "The backup was not written: "+err.Error())
	}
	return c.JSON(http.StatusCreated, map[string]string{"path": path})
}

// AskPair asks the server that runs on a data folder for a pairing link.
func AskPair(ctx context.Context, data string, role gate.Role) (PairLink, error) {
	var link PairLink
	err := askAdmin(ctx, data, "/pair", map[string]any{"role": role}, &link)
	return link, err
}

// AskBackup has the server that runs on a data folder write a copy of its
// store to a file.
func AskBackup(ctx context.Context, data, file string) error {
	abs, err := filepath.Abs(file)
	if err != nil {
		return fmt.Errorf("find the path of %s: %w", file, err)
	}
	return askAdmin(ctx, data, "/backup", map[string]any{"path": abs}, nil)
}

// askAdmin makes one request over the admin socket of a data folder.
func askAdmin(ctx context.Context, data, path string, in, out any) error {
	text, err := json.Marshal(in)
	if err != nil {
		return fmt.Errorf("write the request: %w", err)
	}
	dial := func(ctx context.Context, _, _ string) (net.Conn, error) {
		var d net.Dialer
		return d.DialContext(ctx, "unix", filepath.Join(data, socketName))
	}
	transport := &http.Transport{DialContext: dial}
	defer transport.CloseIdleConnections()
	req, err := http.NewRequestWithContext(ctx, http.MethodPost, "http://admin"+path, bytes.NewReader(text))
	if err != nil {
		return fmt.Errorf("make the request: %w", err)
	}
	req.Header.Set("Content-Type", "application/json")
	resp, err := transport.RoundTrip(req)
	if err != nil {
		return fmt.Errorf("%w: %s: start it with wakeback serve, or name its folder with --data: %w", ErrNotRunning, data, err)
	}
	defer resp.Body.Close()
	if resp.StatusCode >= 300 {
		var p Problem
		if err := json.NewDecoder(resp.Body).Decode(&p); err != nil {
			return fmt.Errorf("the server answered %s", resp.Status)
		}
		return fmt.Errorf("the server refused: %s: %s", p.Title, p.Detail)
	}
	if out == nil {
		return nil
	}
	if err := json.NewDecoder(resp.Body).Decode(out); err != nil {
		return fmt.Errorf("read the server's answer: %w", err)
	}
	return nil
}
