package server

import (
	"bytes"
	"context"
	"encoding/json"
	"errors"
	"net"
	"net/http"
	"path/filepath"
	"strings"
	"testing"
	"time"

	"github.com/gorilla/websocket"

	"wakeback/server/gate"
	"wakeback/server/store"
)

// running is a server as the program runs it.
type running struct {
	Ready
	dir  string
	stop func() error
}

func runServer(t *testing.T, dir string, change func(*Config)) *running {
	t.Helper()
	ready := make(chan Ready, 1)
	cfg := Config{Listen: "127.0.0.1:0", Data: dir, Ready: func(r Ready) { ready <- r }}
	if change != nil {
		change(&cfg)
	}
	ctx, cancel := context.WithCancel(context.Background())
	ended := make(chan error, 1)
	go func() { ended <- Run(ctx, cfg) }()
	r := &running{dir: dir}
	stopped := false
	r.stop = func() error {
		if stopped {
			return nil
		}
		stopped = true
		cancel()
		return <-ended
	}
	t.Cleanup(func() {
		if err := r.stop(); err != nil {
			t.Error(err)
		}
	})
	select {
	case r.Ready = <-ready:
	case err := <-ended:
		t.Fatalf("Run = %v", err)
	case <-time.After(10 * time.Second):
		t.Fatal("not ready after 10 s")
	}
	return r
}

func (r *running) post(t *testing.T, path, token string, in any) (int, []byte) {
	t.Helper()
	text, err := json.Marshal(in)
	if err != nil {
		t.Fatal(err)
	}
	req, err := http.NewRequest("POST", "http://"+r.Addr.String()+path, bytes.NewReader(text))
	if err != nil {
		t.Fatal(err)
	}
	req.Header.Set("Content-Type", "application/json")
	if token != "" {
		req.Header.Set("Authorization", "Bearer "+token)
	}
	req.Close = true
	resp, err := http.DefaultTransport.RoundTrip(req)
	if err != nil {
		t.Fatal(err)
	}
	defer resp.Body.Close()
	var b bytes.Buffer
	if _, err := b.ReadFrom(resp.Body); err != nil {
		t.Fatal(err)
	}
	return resp.StatusCode, b.Bytes()
}

// TestRunPairMarkStopAndRunAgain is the life of a server: paired by command,
// marked, stopped while a stream is open, and run again on the same folder.
func TestRunPairMarkStopAndRunAgain(t *testing.T) {
	dir := t.TempDir()
	r := runServer(t, dir, nil)
	link, err := AskPair(context.Background(), dir, gate.Skipper)
	if err != nil {
		t.Fatal(err)
	}
	if !strings.HasPrefix(link.URL, r.URL+"/#pair=") || link.Role != gate.Skipper || time.Until(link.ExpiresAt) > 10*time.Minute {
		t.Errorf("link = %+v", link)
	}
	status, body := r.post(t, api+"/pair", "", map[string]any{"code": link.Code, "name": "script"})
	var paired pairAnswer
	if err := json.Unmarshal(body, &paired); err != nil || status != 201 {
		t.Fatalf("pair = %d %s", status, body)
	}
	url := "ws://" + r.Addr.String() + api + "/stream"
	conn, _, err := websocket.DefaultDialer.Dial(url, bearer(paired.Token))
	if err != nil {
		t.Fatal(err)
	}
	defer conn.Close()
	ear := &ear{t, conn}
	ear.wait("tick", nil)
	mark := map[string]any{"id": newID(), "at": time.Now(), "position": somewhere}
	status, first := r.post(t, api+"/marks", paired.Token, mark)
	if status != 201 {
		t.Fatalf("mark = %d %s", status, first)
	}
	ear.wait("event", nil)
	steer := ear.wait("steer", nil)
	if steer["elapsed_s"] == nil {
		t.Errorf("steer = %v, want the clock running", steer)
	}
	backup := filepath.Join(t.TempDir(), "copy.db")
	if err := AskBackup(context.Background(), dir, backup); err != nil {
		t.Error(err)
	}
	if err := AskBackup(context.Background(), dir, filepath.Join(dir, "no", "such", "folder")); err == nil {
		t.Error("a backup into a folder that is not there was told to be done")
	}
	if err := r.stop(); err != nil {
		t.Fatal(err)
	}
	for {
		_, _, err := conn.ReadMessage()
		if err == nil {
			continue
		}
		if !websocket.IsCloseError(err, websocket.CloseGoingAway) {
			t.Errorf("stream ended with %v, want close code 1001", err)
		}
		break
	}
	if _, err := AskPair(context.Background(), dir, gate.Crew); !errors.Is(err, ErrNotRunning) {
		t.Errorf("AskPair without a server = %v, want ErrNotRunning", err)
	}
	r = runServer(t, dir, nil)
	if status, again := r.post(t, api+"/marks", paired.Token, mark); status != 200 || !bytes.Equal(first, again) {
		t.Errorf("after the restart the mark = %d %s, want 200 %s", status, again, first)
	}
}

func TestRunRefuses(t *testing.T) {
	dir := t.TempDir()
	if err := Run(context.Background(), Config{Listen: "0.0.0.0:0", Data: dir}); !errors.Is(err, ErrConfig) {
		t.Errorf("plain on all addresses = %v, want ErrConfig", err)
	}
	r := runServer(t, dir, nil)
	if err := Run(context.Background(), Config{Listen: "127.0.0.1:0", Data: dir}); !errors.Is(err, store.ErrLocked) {
		t.Errorf("a second server on one folder = %v, want ErrLocked", err)
	}
	if err := Run(context.Background(), Config{Listen: r.Addr.String(), Data: t.TempDir()}); err == nil {
		t.Error("a second server on one address was run")
	}
}

// TestSlowHeadersAreCutOff: a client that never ends its header holds nothing.
func TestSlowHeadersAreCutOff(t *testing.T) {
	if testing.Short() {
		t.Skip("takes as long as the header timeout, 5 s")
	}
	r := runServer(t, t.TempDir(), nil)
	conn, err := net.Dial("tcp", r.Addr.String())
	if err != nil {
		t.Fatal(err)
	}
	defer conn.Close()
	if _, err := conn.Write([]byte("GET / HTTP/1.1\r\nHost: local")); err != nil {
		t.Fatal(err)
	}
	_ = conn.SetReadDeadline(time.Now().Add(10 * time.Second))
	began := time.Now()
	var b [512]byte
	for err == nil {
		_, err = conn.Read(b[:])
	}
	var timeout net.Error
	if errors.As(err, &timeout) && timeout.Timeout() {
		t.Errorf("still open after %v", time.Since(began))
	}
}
