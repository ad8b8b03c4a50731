package store

import (
	"errors"
	"fmt"
	"os"
	"path/filepath"
	"strings"
	"syscall"
	"testing"
	"time"

	"wakeback/search/incident"
)

// smallDisk is a real file system of its own, of a size, or the test is
// skipped where this user may not mount one.
func smallDisk(t *testing.T, bytes int) string {
	t.Helper()
	dir := t.TempDir()
	if err := syscall.Mount("store-test", dir, "tmpfs", 0, fmt.Sprintf("size=%d", bytes)); err != nil {
		t.Skipf("a small disk cannot be mounted (%v): run as root", err)
	}
	t.Cleanup(func() {
		if err := syscall.Unmount(dir, syscall.MNT_DETACH); err != nil {
			t.Error(err)
		}
	})
	return dir
}

func fillUp(t *testing.T, dir string) (ballast string) {
	t.Helper()
	ballast = filepath.Join(dir, "ballast")
	f, err := os.Create(ballast)
	if err != nil {
		t.Fatal(err)
	}
	defer f.Close()
	for block := make([]byte, 4096); ; {
		if _, err := f.Write(block); errors.Is(err, syscall.ENOSPC) {
			return ballast
		} else if err != nil {
			t.Fatal(err)
		}
	}
}

// A real disk fills up under a running store: it says so, reads on, opens
// again to read while the disk is still full, and writes when there is room.
func TestRealDiskFull(t *testing.T) {
	dir := smallDisk(t, 1<<20)
	s, _ := open(t, Options{Dir: dir})
	c := newChain('a')
	keep(t, s, c.next(t, "before"))
	if err := s.AppendTrack(phone, steaming(t0, 60)); err != nil {
		t.Fatal(err)
	}
	ballast := fillUp(t, dir)
	kept := 1
	var err error
	for range 1000 {
		if _, err = s.Append([]incident.Event{c.next(t, strings.Repeat("x", 2000))}); err != nil {
			break
		}
		kept++
	}
	if !errors.Is(err, ErrNotDurable) || !errors.Is(err, ErrDiskFull) || !strings.Contains(s.Health().Problem, "full") {
		t.Fatalf("%v, health %+v", err, s.Health())
	}
	_ = s.Close()

	s, r := open(t, Options{Dir: dir})
	got := len(all(t, s))
	if got < kept {
		t.Errorf("%d of %d events: %+v", got, kept, r)
	}
	if len(track(t, s, t0, t0.Add(time.Hour))) != 60 {
		t.Error("the track cannot be read")
	}
	if r.Mode == ReadOnly {
		if _, err := s.Append([]incident.Event{c.next(t, "x")}); !errors.Is(err, ErrNotDurable) || !errors.Is(err, ErrDiskFull) {
			t.Errorf("while it is full: %v", err)
		}
	} else {
		for range 1000 { // it opened without writing, and finds out when it does
			if _, err = s.Append([]incident.Event{c.next(t, strings.Repeat("x", 2000))}); err != nil {
				break
			}
		}
		if !errors.Is(err, ErrDiskFull) {
			t.Errorf("while it is full: %v", err)
		}
	}
	got = len(all(t, s))
	if err := os.Remove(ballast); err != nil {
		t.Fatal(err)
	}
	if err := s.Renew(); err != nil {
		t.Fatalf("after room was made: %v", err)
	}
	keep(t, s, newChain('b').next(t, "room again"))
	closeStore(t, s)
	s, r = open(t, Options{Dir: dir})
	if len(all(t, s)) != got+1 || len(r.Warnings) != 0 {
		t.Errorf("%d events, want %d: %+v", len(all(t, s)), got+1, r)
	}
}

// A card that turns read-only, as ext4 does it after an error: the store
// opens to read, says so, and acknowledges nothing.
func TestReadOnlyDisk(t *testing.T) {
	dir := smallDisk(t, 4<<20)
	want := filled(t, dir, 5)
	s, _ := open(t, Options{Dir: dir})
	if err := s.AppendTrack(phone, steaming(t0, 60)); err != nil {
		t.Fatal(err)
	}
	closeStore(t, s)
	if err := syscall.Mount("store-test", dir, "tmpfs", syscall.MS_REMOUNT|syscall.MS_RDONLY, ""); err != nil {
		t.Fatal(err)
	}
	s, r := open(t, Options{Dir: dir})
	if r.Mode != ReadOnly || len(all(t, s)) != len(want) || len(r.Warnings) == 0 || r.Events != len(want) {
		t.Errorf("%+v, %d events", r, len(all(t, s)))
	}
	h := s.Health()
	if h.Durable || !strings.Contains(h.Problem, "cannot be written") || h.TrackProblem == "" {
		t.Errorf("health %+v", h)
	}
	if _, err := s.Append([]incident.Event{newChain('b').next(t, "x")}); !errors.Is(err, ErrNotDurable) || !errors.Is(err, ErrReadOnly) {
		t.Errorf("append: %v", err)
	}
	if docs, _ := s.Docs("device"); len(docs) != 1 || len(track(t, s, t0, t0.Add(time.Hour))) != 60 {
		t.Error("documents or the track cannot be read")
	}
	if err := s.Backup(filepath.Join(t.TempDir(), dbName)); err != nil {
		t.Errorf("copy to another disk: %v", err)
	}
	if err := s.Renew(); !errors.Is(err, ErrReadOnly) {
		t.Errorf("renew: %v", err)
	}
	if _, _, err := Open(t.Context(), Options{Dir: filepath.Join(dir, "new")}); !errors.Is(err, ErrReadOnly) {
		t.Errorf("a first start on a read-only disk: %v", err)
	}
	closeStore(t, s)
}

// The file is cut short under a running store: reading the track gives an
// error; the process, and the events, stay.
func TestFileVanishesUnderARunningStore(t *testing.T) {
	dir := t.TempDir()
	s, _ := open(t, Options{Dir: dir})
	c := newChain('a')
	keep(t, s, c.next(t, "before"))
	if err := s.AppendTrack(phone, steaming(t0, 3600)); err != nil {
		t.Fatal(err)
	}
	if err := os.Truncate(filepath.Join(dir, tracksName), 0); err != nil {
		t.Fatal(err)
	}
	if _, err := s.Track(phone, t0, t0.Add(time.Hour)); !errors.Is(err, errFault) {
		t.Errorf("track: %v", err)
	}
	keep(t, s, c.next(t, "marks are kept all the same"))
	_ = s.Close()
}
