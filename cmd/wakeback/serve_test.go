package main

import (
	"bufio"
	"bytes"
	"context"
	"encoding/json"
	"net/http"
	"os"
	"os/exec"
	"path/filepath"
	"strings"
	"sync"
	"syscall"
	"testing"
	"time"

	"github.com/google/uuid"
)

// program is wakeback serve, running.
type program struct {
	url    string
	said   string // before the line that names the address, and that line
	errs   *lockedBuffer
	cmd    *exec.Cmd
	exited chan error
}

// lockedBuffer is written by a process and read by a test.
type lockedBuffer struct {
	mu sync.Mutex // guards b
	b  bytes.Buffer
}

func (l *lockedBuffer) Write(p []byte) (int, error) {
	l.mu.Lock()
	defer l.mu.Unlock()
	return l.b.Write(p)
}

func (l *lockedBuffer) String() string {
	l.mu.Lock()
	defer l.mu.Unlock()
	return l.b.String()
}

// serve starts the program and waits until it says where to open it.
func serve(t *testing.T, args ...string) *program {
	t.Helper()
	ctx, cancel := context.WithTimeout(context.Background(), 2*time.Minute) // for one that hangs
	t.Cleanup(cancel)
	p := &program{errs: &lockedBuffer{}, cmd: command(t, ctx, append([]string{"serve"}, args...)...), exited: make(chan error, 1)}
	p.cmd.Stderr = p.errs
	out, err := p.cmd.StdoutPipe()
	if err != nil {
		t.Fatal(err)
	}
	if err := p.cmd.Start(); err != nil {
		t.Fatal(err)
	}
	lines := bufio.NewScanner(out)
	for p.url == "" && lines.Scan() {
		p.said += lines.Text() + "\n"
		p.url, _ = strings.CutPrefix(lines.Text(), "Open ")
		if p.url == lines.Text() {
			p.url = ""
		}
	}
	go func() {
		for lines.Scan() { // so that the program never waits for its reader
		}
		p.exited <- p.cmd.Wait()
	}()
	t.Cleanup(func() { p.stop(t) })
	if p.url == "" {
		t.Fatalf("serve %v ended without an address: %s", args, p.errs)
	}
	return p
}

// stop asks it to end, as an operator does, and holds it to exit code 0.
func (p *program) stop(t *testing.T) {
	t.Helper()
	if p.exited == nil {
		return
	}
	_ = p.cmd.Process.Signal(syscall.SIGTERM)
	if err := <-p.exited; err != nil {
		t.Errorf("serve ended with %v: %s", err, p.errs)
	}
	p.exited = nil
}

// do makes a request of the running program.
func (p *program) do(t *testing.T, method, path, token string, body any) (int, map[string]any) {
	t.Helper()
	text, err := json.Marshal(body)
	if err != nil {
		t.Fatal(err)
	}
	req, err := http.NewRequest(method, p.url+path, bytes.NewReader(text))
	if err != nil {
		t.Fatal(err)
	}
	req.Header.Set("Content-Type", "application/json")
	if token != "" {
		req.Header.Set("Authorization", "Bearer "+token)
	}
	resp, err := http.DefaultClient.Do(req)
	if err != nil {
		t.Fatal(err)
	}
	defer resp.Body.Close()
	var doc map[string]any
	if err := json.NewDecoder(resp.Body).Decode(&doc); err != nil {
		t.Fatalf("%s %s: %v", method, path, err)
	}
	return resp.StatusCode, doc
}

func (p *program) mark(t *testing.T, token string) (status int, incident string) {
	t.Helper()
	status, doc := p.do(t, "POST", "/api/v1/marks", token, map[string]any{
		"id": uuid.Must(uuid.NewV7()).String(), "at": time.Now().UTC(), "position": map[string]any{"lat": 54.1, "lon": 7.9}, "source": "phone",
	})
	if in, ok := doc["incident"].(map[string]any); ok {
		incident, _ = in["id"].(string)
	}
	return status, incident
}

// A server is started, a script is paired by the command, marks, and the mark
// is there after a restart and in a copy made while it ran.
func TestServePairMarkBackup(t *testing.T) {
	data := t.TempDir()
	p := serve(t, "--plain", "--listen", "127.0.0.1:0", "--data", data)
	if status, _ := p.mark(t, ""); status != http.StatusUnauthorized {
		t.Errorf("a mark by nobody = %d, want 401", status)
	}

	link := document(t, call(t, "pair", "--data", data, "--role", "skipper", "--json"))
	if url, _ := link["url"].(string); !strings.HasPrefix(url, p.url) || !strings.Contains(url, link["code"].(string)) {
		t.Errorf("pair = %v, want a link below %s with the code", link, p.url)
	}
	if until, err := time.Parse(time.RFC3339, link["expires_at"].(string)); err != nil || !until.After(time.Now()) {
		t.Errorf("expires_at = %v", link["expires_at"])
	}
	status, device := p.do(t, "POST", "/api/v1/pair", "", map[string]any{"code": link["code"], "name": "a script"})
	token, _ := device["token"].(string)
	if status != http.StatusCreated || token == "" {
		t.Fatalf("pair = %d %v", status, device)
	}
	if status, _ := p.do(t, "POST", "/api/v1/pair", "", map[string]any{"code": link["code"], "name": "another"}); status < 400 {
		t.Errorf("the same code again = %d, want a refusal", status)
	}
	status, incident := p.mark(t, token)
	if status != http.StatusCreated {
		t.Fatalf("mark = %d", status)
	}

	copied := t.TempDir()
	if o := call(t, "backup", filepath.Join(copied, "wakeback.db"), "--data", data); o.code != exitOK || !strings.Contains(o.out, "Written:") {
		t.Fatalf("backup = %+v", o)
	}
	if o := call(t, "serve", "--plain", "--listen", "127.0.0.1:0", "--data", data); o.code != exitFailure || !strings.Contains(o.err, "another server is using this folder") {
		t.Errorf("a second server on the folder = %+v", o)
	}
	p.stop(t)
	for name, dir := range map[string]string{"after a restart": data, "in the copy": copied} {
		again := serve(t, "--plain", "--listen", "127.0.0.1:0", "--data", dir)
		if status, doc := again.do(t, "GET", "/api/v1/incidents/"+incident, token, nil); status != http.StatusOK {
			t.Errorf("the incident %s = %d %v", name, status, doc)
		}
		again.stop(t)
	}
}

// pair prints a link, its code and a QR for a person.
func TestPairPrints(t *testing.T) {
	data := t.TempDir()
	p := serve(t, "--plain", "--listen", "127.0.0.1:0", "--data", data)
	o := call(t, "pair", "--data", data)
	for _, want := range []string{"█", "Open  " + p.url, "Code ", "Role   crew"} {
		if !strings.Contains(strings.ReplaceAll(o.out, "Open   ", "Open  "), want) {
			t.Errorf("pair printed %q, lacks %q", o.out, want)
		}
	}
}

func TestServeSaysWhereToOpen(t *testing.T) {
	p := serve(t, "--plain", "--listen", "127.0.0.1:0", "--data", t.TempDir())
	if !strings.Contains(p.said, "█") {
		t.Errorf("no QR before the address: %q", p.said)
	}
	resp, err := http.Get(p.url + "/healthz")
	if err != nil {
		t.Fatal(err)
	}
	resp.Body.Close()
	if resp.StatusCode != http.StatusOK {
		t.Errorf("healthz = %d", resp.StatusCode)
	}
}

// What was invented and what was real do not share a folder unseen.
func TestDemoKeepsApart(t *testing.T) {
	data := t.TempDir()
	serve(t, "--plain", "--listen", "127.0.0.1:0", "--data", data).stop(t)
	if o := call(t, "serve", "--demo", "--data", data); o.code != exitBadInput || !strings.Contains(o.err, "log of real voyages") {
		t.Errorf("a demonstration in a real folder = %+v", o)
	}
	invented := filepath.Join(t.TempDir(), "demo")
	serve(t, "--demo", "--listen", "127.0.0.1:0", "--data", invented).stop(t)
	p := serve(t, "--plain", "--listen", "127.0.0.1:0", "--data", invented)
	if !strings.Contains(p.errs.String(), "invented") {
		t.Errorf("a server on a demonstration's folder does not say so: %q", p.errs)
	}
	if _, err := os.Stat(filepath.Join(invented, "INVENTED")); err != nil {
		t.Error(err)
	}
}
