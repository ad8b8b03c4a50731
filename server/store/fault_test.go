package store

import (
	"errors"
	"fmt"
	"io"
	"os"
	"os/exec"
	"path/filepath"
	"strings"
	"syscall"
	"testing"
	"time"

	"wakeback/search/incident"
)

// faultyJournal fails its n-th call, in one of the ways a disk does. What was
// written and not flushed is lost at crash, as with a power cut.
type faultyJournal struct {
	path    string
	f       *os.File
	n, at   int
	how     string
	flushed int64 // bytes that are on the medium
	written int64
}

func (j *faultyJournal) due() bool { j.n++; return j.n == j.at }

func (j *faultyJournal) Write(p []byte) (int, error) {
	if j.due() {
		switch j.how {
		case "error":
			return 0, syscall.EIO
		case "full":
			return 0, syscall.ENOSPC
		case "short", "torn":
			n, _ := j.f.Write(p[:len(p)/2])
			j.written += int64(n)
			if j.how == "short" {
				return n, nil
			}
			return n, syscall.EIO
		}
	}
	n, err := j.f.Write(p)
	j.written += int64(n)
	return n, err
}

func (j *faultyJournal) Sync() error {
	if j.due() {
		return syscall.EIO
	}
	j.flushed = j.written
	return j.f.Sync()
}

func (j *faultyJournal) Close() error { return j.f.Close() }

// crash ends the file where the medium has it.
func (j *faultyJournal) crash(t *testing.T) {
	t.Helper()
	if err := os.Truncate(j.path, j.flushed); err != nil {
		t.Fatal(err)
	}
}

func faulty(at int, how string, into **faultyJournal) func(string) (JournalFile, error) {
	return func(path string) (JournalFile, error) {
		f, err := os.OpenFile(path, os.O_CREATE|os.O_APPEND|os.O_RDWR, 0o600)
		if err != nil {
			return nil, err
		}
		size, err := f.Seek(0, io.SeekEnd)
		if err != nil {
			return nil, err
		}
		*into = &faultyJournal{path: path, f: f, at: at, how: how, flushed: size, written: size}
		return *into, nil
	}
}

// The n-th call on the journal fails, for every n until a run has no fault,
// and the power is cut behind it. What was acknowledged is there, in order,
// once; what comes again changes nothing; nothing is acknowledged after a
// failure.
func TestJournalFailsAtEveryCall(t *testing.T) {
	for _, how := range []string{"error", "full", "short", "torn"} {
		for n := 1; ; n++ {
			if !faultRound(t, n, how) {
				if n < 10 {
					t.Fatalf("%s: only %d calls", how, n)
				}
				break
			}
		}
	}
}

// faultRound runs a few commits with a fault in the n-th call and reports
// whether it came to that.
func faultRound(t *testing.T, n int, how string) (hit bool) {
	t.Helper()
	dir := t.TempDir()
	var j *faultyJournal
	s, _, err := Open(t.Context(), Options{Dir: dir, OpenJournal: faulty(n, how, &j)})
	if err != nil {
		t.Fatalf("%s %d: open: %v", how, n, err)
	}
	c := newChain('a')
	var sent []incident.Event
	acknowledged := 0
	for i := range 6 {
		batch := []incident.Event{c.next(t, "a"), c.next(t, "b")}
		sent = append(sent, batch...)
		_, err := s.Append(batch)
		switch {
		case err == nil && hit:
			t.Fatalf("%s %d: commit %d is acknowledged after a failure", how, n, i)
		case err == nil:
			acknowledged = len(sent)
		case !errors.Is(err, ErrNotDurable):
			t.Fatalf("%s %d: %v", how, n, err)
		default:
			hit = true
		}
		if got := len(all(t, s)); got != acknowledged {
			t.Fatalf("%s %d: %d events readable, %d acknowledged", how, n, got, acknowledged)
		}
	}
	_ = s.Close()
	j.crash(t)
	s, _ = open(t, Options{Dir: dir})
	checkChain(t, all(t, s), uint64(acknowledged))
	keep(t, s, sent...)
	checkChain(t, all(t, s), uint64(len(sent)))
	if got := len(all(t, s)); got != len(sent) {
		t.Fatalf("%s %d: %d events after sending all %d again", how, n, got, len(sent))
	}
	closeStore(t, s)
	return hit
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
		"flipped bit": func(b []byte, at int) []byte { b[at+page/3] ^= 4; return b },
		"zeros":       func(b []byte, at int) []byte { clear(b[at : at+page]); return b },
		"cut short":   func(b []byte, at int) []byte { return b[:at] },
	}
	modes := map[Mode]int{}
	for name, damage := range damages {
		for at := 0; at+page <= len(db); at += page {
			dir := t.TempDir()
			put(t, dir, dbName, damage(append([]byte(nil), db...), at))
			put(t, dir, journalName, journal)
			begin := time.Now()
			s, r := open(t, Options{Dir: dir})
			if took := time.Since(begin); took > 5*time.Second {
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
		dir := t.TempDir()
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
