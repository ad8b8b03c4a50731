package store

import (
	"errors"
	"path/filepath"
	"strings"
	"sync/atomic"
	"syscall"
	"testing"
	"time"

	"wakeback/search/incident"
)

// switchFS fails every write, or every flush, while it is told to, and can
// keep a flush waiting.
type switchFS struct {
	osFS
	write, flush atomic.Pointer[syscall.Errno]
	hang         atomic.Pointer[chan struct{}]
}

func (f *switchFS) Append(path string) (File, error) {
	file, err := f.osFS.Append(path)
	return switchFile{file, f}, err
}

func (f *switchFS) Create(path string) (File, error) {
	file, err := f.osFS.Create(path)
	return switchFile{file, f}, err
}

type switchFile struct {
	File
	fs *switchFS
}

func (f switchFile) Write(p []byte) (int, error) {
	if e := f.fs.write.Load(); e != nil {
		return 0, *e
	}
	return f.File.Write(p)
}

func (f switchFile) Sync() error {
	if c := f.fs.hang.Load(); c != nil {
		<-*c
	}
	if e := f.fs.flush.Load(); e != nil {
		return *e
	}
	return f.File.Sync()
}

// After a full disk, and after a flush that failed, Renew goes on with fresh
// files: what was acknowledged is in them, the failed ones are kept, and the
// numbers go on.
func TestRenew(t *testing.T) {
	for name, errno := range map[string]syscall.Errno{"full": syscall.ENOSPC, "flush": syscall.EIO} {
		t.Run(name, func(t *testing.T) {
			dir, fs := t.TempDir(), &switchFS{}
			s, _ := open(t, Options{Dir: dir, FS: fs})
			c := newChain('a')
			keep(t, s, c.next(t, "before"))
			if err := s.PutDoc("device", "a", []byte(`{}`)); err != nil {
				t.Fatal(err)
			}
			if errno == syscall.ENOSPC {
				fs.write.Store(&errno)
			} else {
				fs.flush.Store(&errno)
			}
			lost := c.next(t, "never acknowledged")
			if _, err := s.Append([]incident.Event{lost}); !errors.Is(err, ErrNotDurable) {
				t.Fatal(err)
			}
			if err := s.AppendTrack(phone, steaming(t0, 5)); err == nil {
				t.Log("the track does not flush each time") // and so need not notice
			}
			if err := s.Renew(); err == nil || s.Health().Durable {
				t.Fatalf("renewed on a disk that does not write: %v", err)
			}
			if len(all(t, s)) != 1 {
				t.Error("what was acknowledged cannot be read any more")
			}
			epoch := s.Epoch()

			fs.write.Store(nil)
			fs.flush.Store(nil)
			if err := s.Renew(); err != nil {
				t.Fatal(err)
			}
			if h := s.Health(); !h.Durable || h.Problem != "" || h.TrackProblem != "" {
				t.Errorf("health %+v", h)
			}
			kept := keep(t, s, lost)
			if kept[0].Seq != 2 || s.Epoch() != epoch {
				t.Errorf("number %d", kept[0].Seq)
			}
			if err := s.AppendTrack(phone, steaming(t0.Add(time.Minute), 5)); err != nil {
				t.Error(err)
			}
			if failed, _ := filepath.Glob(filepath.Join(dir, "wakeback.*.failed-*")); len(failed) != 2 {
				t.Errorf("kept of the failed files: %v", failed)
			}
			closeStore(t, s)
			s, r := open(t, Options{Dir: dir})
			if docs, _ := s.Docs("device"); r.Mode != Normal || len(all(t, s)) != 2 || len(docs) != 1 || len(r.Warnings) != 0 {
				t.Errorf("opened anew: %+v", r)
			}
		})
	}
}

// After a flush that failed the next start does not trust what the page cache
// shows of the files: it copies them.
func TestFreshFilesAfterAFailedFlush(t *testing.T) {
	dir, fs := t.TempDir(), &switchFS{}
	s, _ := open(t, Options{Dir: dir, FS: fs})
	c := newChain('a')
	keep(t, s, c.next(t, "before"))
	errno := syscall.EIO
	fs.hang.Store(nil)
	fs.flush.Store(&errno)
	if _, err := s.Append([]incident.Event{c.next(t, "after")}); !errors.Is(err, ErrNotDurable) {
		t.Fatal(err)
	}
	_ = s.Close()
	put(t, dir, failedName, []byte("left before the disk went")) // this disk takes no more flushes
	s, r := open(t, Options{Dir: dir})
	if len(all(t, s)) < 1 || len(r.Aside) != 2 || !strings.Contains(r.Aside[0], "failed") || exists(filepath.Join(dir, failedName)) {
		t.Errorf("%+v", r)
	}
	closeStore(t, s)
	if _, r = open(t, Options{Dir: dir}); len(r.Aside) != 0 || r.Mode != Normal {
		t.Errorf("the start after: %+v", r)
	}
}

// A disk that hangs holds up the one who writes and nobody else.
func TestReadingDoesNotWaitForTheDisk(t *testing.T) {
	fs := &switchFS{}
	s, _ := open(t, Options{Dir: t.TempDir(), FS: fs})
	c := newChain('a')
	first := c.next(t, "first")
	keep(t, s, first)
	gate := make(chan struct{})
	fs.hang.Store(&gate)
	done := make(chan error, 1)
	second := c.next(t, "second")
	go func() {
		_, err := s.Append([]incident.Event{second})
		done <- err
	}()
	for s.Health().Waiting == 0 { // until the commit has begun
		select {
		case err := <-done:
			t.Fatalf("the commit did not wait: %v", err)
		case <-time.After(time.Millisecond):
		}
	}
	if _, ok, _ := s.Event(first.ID); !ok || s.LastSeq() != 1 || len(s.Findings()) != 0 {
		t.Error("reading is not possible while the disk hangs")
	}
	if err := s.Backup(filepath.Join(t.TempDir(), "copy.db")); err != nil {
		t.Errorf("a backup to another disk: %v", err)
	}
	fs.hang.Store(nil)
	close(gate)
	if err := <-done; err != nil {
		t.Error(err)
	}
}

// A store that has failed can still be copied away, with its tracks.
func TestBackupOfAFailedStore(t *testing.T) {
	fs := &switchFS{}
	s, _ := open(t, Options{Dir: t.TempDir(), FS: fs})
	c := newChain('a')
	keep(t, s, c.next(t, "before"))
	fixes := steaming(t0, 1000)
	if err := s.AppendTrack(phone, fixes); err != nil {
		t.Fatal(err)
	}
	errno := syscall.EIO
	fs.write.Store(&errno)
	if _, err := s.Append([]incident.Event{c.next(t, "after")}); err == nil {
		t.Fatal("no failure")
	}
	to := t.TempDir()
	for range 2 { // the second replaces the first
		if err := s.Backup(filepath.Join(to, dbName)); err != nil {
			t.Fatal(err)
		}
	}
	copied, r := open(t, Options{Dir: to})
	if len(all(t, copied)) != 1 || len(track(t, copied, t0, t0.Add(time.Hour))) != len(fixes) || len(r.Aside) != 0 {
		t.Errorf("the copy: %+v, %d fixes", r, len(track(t, copied, t0, t0.Add(time.Hour))))
	}
	closeStore(t, copied)
	copied, r = open(t, Options{Dir: to})
	if len(track(t, copied, t0, t0.Add(time.Hour))) != len(fixes) || r.Mode != Normal {
		t.Errorf("the copy opened again: %+v", r)
	}
}

// A second process, and a second store with its journal on the same stick,
// are told which folder within a second.
func TestLockedFolders(t *testing.T) {
	stick := t.TempDir()
	dir := t.TempDir()
	open(t, Options{Dir: dir, JournalDir: stick})
	for _, opt := range []Options{{Dir: dir}, {Dir: t.TempDir(), JournalDir: stick}} {
		begin := time.Now()
		_, _, err := Open(t.Context(), opt)
		if took := time.Since(begin); !errors.Is(err, ErrLocked) || took > time.Second {
			t.Errorf("%v after %s", err, took)
		}
	}
}
