package store

import (
	"bytes"
	"errors"
	"fmt"
	"io"
	"os"
	"os/exec"
	"path/filepath"
	"strings"
	"testing"
	"time"

	"wakeback/drift/nav"
	"wakeback/search/incident"
)

// The n-th call on the disk fails, for every n until a run has no fault, from
// the first opening on, and then the power is cut. What was acknowledged is
// there, in order, once; what comes again changes nothing; nothing is
// acknowledged after a failure.
func TestDiskFailsAtEveryCall(t *testing.T) {
	for _, how := range []string{"error", "full", "short", "torn", "lie"} {
		for _, undo := range []bool{false, true} {
			if undo && how != "error" {
				continue // names are lost the same way whatever else fails
			}
			for n := 1; ; n++ {
				if hit := faultRound(t, n, how, undo); hit == "" {
					if n < 20 {
						t.Fatalf("%s: only %d calls", how, n)
					}
					break
				}
			}
		}
	}
}

// faultRound runs a few commits with a fault in the n-th call and returns the
// call that it came to.
func faultRound(t *testing.T, n int, how string, undo bool) (hit string) {
	t.Helper()
	dir, fs := quickDir(t), newFaultFS(n, how)
	defer func() {
		if t.Failed() {
			t.Logf("%s in call %d (%s), undo %t", how, n, fs.hit, undo)
		}
	}()
	c := newChain('a')
	var sent []incident.Event
	acknowledged, docs := 0, 0
	s, _, err := Open(t.Context(), Options{Dir: dir, FS: fs})
	if err == nil {
		sent, acknowledged, docs = workload(t, s, c)
		_ = s.Close()
	} else if fs.hit == "" {
		t.Fatalf("open without a fault: %v", err)
	}
	fs.crash(t, undo)

	s, r := open(t, Options{Dir: dir})
	checkChain(t, all(t, s), uint64(acknowledged))
	if got, _ := s.Docs("device"); len(got) < docs {
		t.Fatalf("%d of %d acknowledged documents are there", len(got), docs)
	}
	if r.Mode == Emptied {
		t.Fatalf("both logs were lost: %+v", r)
	}
	for len(sent) > 0 {
		kept := keep(t, s, sent[0])
		if kept[0].DeviceSeq != sent[0].DeviceSeq {
			t.Fatalf("sent %d, kept %d", sent[0].DeviceSeq, kept[0].DeviceSeq)
		}
		sent = sent[1:]
	}
	checkChain(t, all(t, s), c.last.DeviceSeq)
	if got := uint64(len(all(t, s))); got != c.last.DeviceSeq {
		t.Fatalf("%d events after sending all %d again", got, c.last.DeviceSeq)
	}
	closeStore(t, s)
	return fs.hit
}

// workload commits pairs of events with documents and tracks in between.
func workload(t *testing.T, s *Store, c *chain) (sent []incident.Event, acknowledged, docs int) {
	t.Helper()
	failed := false
	check := func(what string, err error) bool {
		switch {
		case err == nil && failed:
			t.Fatalf("%s is acknowledged after a failure", what)
		case err != nil && !errors.Is(err, ErrNotDurable):
			t.Fatalf("%s: %v", what, err)
		}
		failed = failed || err != nil
		return err == nil
	}
	for i := range 4 {
		batch := []incident.Event{c.next(t, "a"), c.next(t, "b")}
		sent = append(sent, batch...)
		_, err := s.Append(batch)
		if check("commit", err) {
			acknowledged = len(sent)
		}
		if check("document", s.PutDoc("device", fmt.Sprint(i), []byte(`{}`))) {
			docs++
		}
		if err := s.AppendTrack(c.device, []nav.Fix{{At: t0.Add(time.Duration(i) * time.Hour)}}); err != nil && !errors.Is(err, ErrNotDurable) {
			t.Fatal(err)
		}
		if got := len(all(t, s)); got != acknowledged {
			t.Fatalf("%d events readable, %d acknowledged", got, acknowledged)
		}
		if h := s.Health(); h.Durable == failed {
			t.Fatalf("health %+v after a failure", h)
		}
	}
	return sent, acknowledged, docs
}

// The n-th call fails while a damaged file is made again from the journal,
// and while a damaged journal is made again from the file; then the power is
// cut. Whatever was there before is there after the next start.
func TestDiskFailsWhileMending(t *testing.T) {
	origin := t.TempDir()
	want := filled(t, origin, 12)
	db, journal := slurp(t, origin, dbName), slurp(t, origin, journalName)
	badDB, badJournal := bytes.Clone(db), bytes.Clone(journal)
	clear(badDB[2*os.Getpagesize():])
	badJournal[len(badJournal)/2] ^= 1
	for name, files := range map[string][2][]byte{
		"file damaged": {badDB, journal}, "file missing": {nil, journal},
		"journal damaged": {db, badJournal}, "journal missing": {db, nil},
	} {
		for n := 1; ; n++ {
			dir, fs := quickDir(t), newFaultFS(n, []string{"error", "torn", "full"}[n%3])
			for i, name := range []string{dbName, journalName} {
				if files[i] != nil {
					put(t, dir, name, files[i])
				}
			}
			if s, _, err := Open(t.Context(), Options{Dir: dir, FS: fs}); err == nil {
				if got := len(all(t, s)); got != len(want) {
					t.Fatalf("%s, %s: %d of %d events", name, fs.hit, got, len(want))
				}
				_ = s.Close()
			}
			fs.crash(t, n%2 == 0)
			s, r := open(t, Options{Dir: dir})
			if got := all(t, s); len(got) != len(want) || r.Mode == Emptied || r.Mode == Fresh {
				t.Fatalf("%s, %s: %d of %d events, %+v", name, fs.hit, len(got), len(want), r)
			}
			closeStore(t, s)
			if fs.hit == "" {
				break
			}
		}
	}
}

// filled makes a store with some events and a document, and closes it.
func filled(t *testing.T, dir string, n int) []incident.Event {
	t.Helper()
	s, _ := open(t, Options{Dir: dir})
	c := newChain('a')
	for range n {
		keep(t, s, c.next(t, strings.Repeat("x", 200)))
	}
	if err := s.PutDoc("device", "a", []byte(`{"name":"Ane"}`)); err != nil {
		t.Fatal(err)
	}
	events := all(t, s)
	closeStore(t, s)
	return events
}

// Every page of the file is damaged in turn, by a flipped bit, by zeros and by
// cutting the file there: the store opens in a stated mode within five
// seconds, with every event, and sets aside what it could not use.
func TestDamagedFileIsRebuilt(t *testing.T) {
	origin := t.TempDir()
	want := filled(t, origin, 25)
	db, journal := slurp(t, origin, dbName), slurp(t, origin, journalName)
	page := os.Getpagesize()
	damages := map[string]func([]byte, int) []byte{
		"flipped bit in the head": func(b []byte, at int) []byte { b[at+10] ^= 4; return b },
		"flipped bit in a list":   func(b []byte, at int) []byte { b[at+36] ^= 4; return b },
		"flipped bit":             func(b []byte, at int) []byte { b[at+page/3] ^= 4; return b },
		"flipped bit at the end":  func(b []byte, at int) []byte { b[at+page-40] ^= 4; return b },
		"zeros":                   func(b []byte, at int) []byte { clear(b[at : at+page]); return b },
		"cut short":               func(b []byte, at int) []byte { return b[:at] },
	}
	modes := map[Mode]int{}
	for name, damage := range damages {
		for at := 0; at+page <= len(db); at += page {
			dir := quickDir(t)
			put(t, dir, dbName, damage(append([]byte(nil), db...), at))
			put(t, dir, journalName, journal)
			begin := time.Now()
			s, r := open(t, Options{Dir: dir})
			if took := time.Since(begin); took > 15*time.Second {
				t.Errorf("%s at %d: opening took %s", name, at, took)
			}
			if got := all(t, s); len(got) != len(want) || got[len(got)-1].Hash != want[len(want)-1].Hash {
				t.Errorf("%s at %d: %d of %d events, mode %s", name, at, len(got), len(want), r.Mode)
			}
			if r.Mode == Rebuilt && (len(r.Aside) == 0 || len(r.Warnings) == 0) {
				t.Errorf("%s at %d: rebuilt without a word: %+v", name, at, r)
			}
			if docs, _ := s.Docs("device"); string(docs["a"]) != `{"name":"Ane"}` {
				t.Errorf("%s at %d: the document is gone", name, at)
			}
			modes[r.Mode]++
			closeStore(t, s)
		}
	}
	t.Logf("modes: %v", modes)
	if modes[Rebuilt] == 0 {
		t.Error("no damage was found")
	}
}

// The journal is damaged at every four hundredth byte: the file has everything, so
// nothing is lost, and the journal is set aside or its end cut off.
func TestDamagedJournal(t *testing.T) {
	origin := t.TempDir()
	want := filled(t, origin, 15)
	db, journal := slurp(t, origin, dbName), slurp(t, origin, journalName)
	for at := 0; at < len(journal); at += 401 {
		dir := quickDir(t)
		broken := append([]byte(nil), journal...)
		broken[at] ^= 0x20
		put(t, dir, dbName, db)
		put(t, dir, journalName, broken)
		s, r := open(t, Options{Dir: dir})
		if got := all(t, s); len(got) != len(want) {
			t.Fatalf("byte %d: %d of %d events, %+v", at, len(got), len(want), r)
		}
		if len(r.Aside) == 0 {
			t.Fatalf("byte %d: nothing was set aside: %+v", at, r)
		}
		closeStore(t, s)
		// The journal is whole again: the file alone can be lost now.
		if err := os.Remove(filepath.Join(dir, dbName)); err != nil {
			t.Fatal(err)
		}
		s, r = open(t, Options{Dir: dir})
		if got := all(t, s); len(got) != len(want) || r.Mode != Rebuilt {
			t.Fatalf("byte %d: %d of %d events from the mended journal, mode %s", at, len(got), len(want), r.Mode)
		}
		closeStore(t, s)
	}
}

// Both logs are lost: the store starts empty, says so, and has another epoch.
func TestBothDamaged(t *testing.T) {
	dir := t.TempDir()
	filled(t, dir, 5)
	s, _ := open(t, Options{Dir: dir})
	epoch := s.Epoch()
	closeStore(t, s)
	put(t, dir, dbName, []byte(strings.Repeat("not a store ", 1000)))
	put(t, dir, journalName, []byte("not a journal"))
	s, r := open(t, Options{Dir: dir})
	if r.Mode != Emptied || len(r.Aside) != 2 || len(r.Warnings) < 2 || s.Epoch() == epoch || len(all(t, s)) != 0 {
		t.Errorf("report %+v, same epoch %t", r, s.Epoch() == epoch)
	}
	keep(t, s, newChain('b').next(t, "goes on"))
}

// An old copy of the file is put back beside the journal: it is brought up.
func TestOldCopyIsBroughtUp(t *testing.T) {
	dir := t.TempDir()
	filled(t, dir, 5)
	old := slurp(t, dir, dbName)
	s, _ := open(t, Options{Dir: dir})
	keep(t, s, newChain('b').next(t, "later"))
	if err := s.PutDoc("device", "b", []byte(`{"name":"Bo"}`)); err != nil {
		t.Fatal(err)
	}
	want := len(all(t, s))
	closeStore(t, s)
	put(t, dir, dbName, old)
	s, r := open(t, Options{Dir: dir})
	docs, _ := s.Docs("device")
	if r.Mode != CaughtUp || len(all(t, s)) != want || len(docs) != 2 {
		t.Errorf("mode %s, %d of %d events, %d documents", r.Mode, len(all(t, s)), want, len(docs))
	}
}

func slurp(t *testing.T, dir, name string) []byte {
	t.Helper()
	b, err := os.ReadFile(filepath.Join(dir, name))
	if err != nil {
		t.Fatal(err)
	}
	return b
}

func put(t *testing.T, dir, name string, data []byte) {
	t.Helper()
	if err := os.WriteFile(filepath.Join(dir, name), data, 0o600); err != nil {
		t.Fatal(err)
	}
}

// Faults of the system itself, injected into the writer's calls: the writer
// stops with the error, and everything that it acknowledged is there.
func TestSystemCallsFail(t *testing.T) {
	strace, err := exec.LookPath("strace")
	if err != nil {
		t.Skip("strace is not installed: it injects the faults")
	}
	for _, fault := range []string{
		"fdatasync:error=EIO:when=20+", "fsync:error=EIO:when=20+", "pwrite64:error=ENOSPC:when=60+",
	} {
		call, _, _ := strings.Cut(fault, ":")
		dir := t.TempDir()
		cmd := exec.Command(strace, "-f", "-o", "/dev/null", "-e", "trace="+call, "-e", "inject="+fault, os.Args[0])
		cmd.Env = append(os.Environ(), writerEnv+"="+dir)
		var said strings.Builder
		cmd.Stderr = &said
		out, err := cmd.StdoutPipe()
		if err != nil {
			t.Fatal(err)
		}
		if err := cmd.Start(); err != nil {
			t.Fatal(err)
		}
		timer := time.AfterFunc(20*time.Second, func() { _ = cmd.Process.Kill() })
		text, _ := io.ReadAll(out)
		waitErr := cmd.Wait()
		timer.Stop()
		if strings.Contains(said.String(), "ptrace") && len(text) == 0 {
			t.Skipf("strace may not trace here: %s", said.String())
		}
		if waitErr == nil {
			t.Errorf("%s: the writer did not notice", fault)
		}
		acknowledged := uint64(strings.Count(string(text), "\n"))
		s, _ := open(t, Options{Dir: dir})
		checkChain(t, all(t, s), acknowledged)
		t.Logf("%s: %d acknowledged, %s", fault, acknowledged, firstLine(said.String()))
		closeStore(t, s)
	}
}

func firstLine(s string) string {
	line, _, _ := strings.Cut(s, "\n")
	return fmt.Sprintf("%.120s", line)
}
