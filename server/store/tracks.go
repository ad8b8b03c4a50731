package store

import (
	"context"
	"errors"
	"fmt"
	"log/slog"
	"os"
	"path/filepath"
	"sync"
	"time"

	"go.etcd.io/bbolt"

	"wakeback/drift/nav"
	"wakeback/search/incident"
)

// tracks is the positions, in files of their own. What goes wrong here never
// keeps a mark from being kept.
type tracks struct {
	fs            FS
	log           *slog.Logger
	now           func() time.Time
	path, journal string

	// mu makes commits one after the other, and guards what they use.
	mu      sync.Mutex
	out     journal
	flushed time.Time // when the journal was

	// state guards which file is open and what failed; never held while the disk works.
	state  sync.RWMutex
	db     *bbolt.DB
	broken *bbolt.DB // one that had a fault
	failed error

	back sync.WaitGroup // reading back from the journal
	stop context.CancelFunc
}

func newTracks(opt Options) *tracks {
	return &tracks{
		fs: opt.FS, log: opt.Log, now: opt.Now,
		stop: func() {},
		path: filepath.Join(opt.Dir, tracksName), journal: filepath.Join(opt.JournalDir, tracksJournalName),
	}
}

// use works on the file that is open. After a fault bbolt may hold its own
// locks for ever, so that the file is not touched again until it is renewed.
func (t *tracks) use(fn func(*bbolt.DB) error) error {
	t.state.RLock()
	db, failed := t.db, t.failed
	t.state.RUnlock()
	if db == nil {
		return errors.Join(errors.New("the file of tracks is not open"), failed)
	}
	err := guarded(func() error { return fn(db) })
	if errors.Is(err, errFault) {
		_ = t.fail(err)
		t.state.Lock()
		if t.db == db {
			t.db, t.broken = nil, db
		}
		t.state.Unlock()
	}
	return err
}

func (t *tracks) problem() error {
	t.state.RLock()
	defer t.state.RUnlock()
	return t.failed
}

func (t *tracks) fail(err error) error {
	err = classify(err)
	t.state.Lock()
	t.failed = err
	t.state.Unlock()
	t.log.Error("positions are not recorded any more", "error", err)
	return fmt.Errorf("%w: %w", ErrNotDurable, err)
}

// AppendTrack keeps fixes of a device, in any order, to the millisecond and
// 1e-7 degree; those without a place on earth are left out. When it returns they are
// on disk, in one file; the journal of tracks is flushed once a minute. It
// shares no lock with [Store.Append].
func (s *Store) AppendTrack(device incident.DeviceID, fixes []nav.Fix) error {
	return s.tracks.append(string(device), recordable(fixes))
}

// trackFlush is how much of its second copy a track may lose with the power.
// Our choice, because each flush is felt by a mark that comes with it.
const trackFlush = time.Minute

func (t *tracks) append(device string, fixes []nav.Fix) error {
	if len(fixes) == 0 {
		return nil
	}
	f, err := trackFrame(device, fixes)
	if err != nil {
		return err
	}
	t.mu.Lock()
	defer t.mu.Unlock()
	if err := t.problem(); err != nil {
		return fmt.Errorf("%w: %w", ErrNotDurable, err)
	}
	err = t.use(func(db *bbolt.DB) error {
		return db.Update(func(tx *bbolt.Tx) error { return putTrack(tx.Bucket(bucketTracks), device, fixes) })
	})
	if err == nil {
		now := t.now()
		flush := now.Sub(t.flushed).Abs() >= trackFlush
		if err = t.out.write(f, flush); err == nil && flush {
			t.flushed = now
		}
	}
	if err != nil {
		return t.fail(fmt.Errorf("write the track of %s: %w", device, err))
	}
	return nil
}

// Track returns the fixes of a device from one moment to another, both
// included, in order of time. Stretches that do not check are left out and
// the error says so, with the fixes that are good.
func (s *Store) Track(device incident.DeviceID, from, to time.Time) ([]nav.Fix, error) {
	var fixes []nav.Fix
	damaged := 0
	err := s.tracks.view(func(b *bbolt.Bucket) error {
		fixes, damaged = readTrack(b, string(device), from, to)
		return nil
	})
	if err == nil && damaged > 0 {
		err = fmt.Errorf("%w: %d of them are left out", errTrack, damaged)
	}
	if err != nil {
		err = fmt.Errorf("read the track of %s: %w", device, err)
	}
	return nav.NewTrack(fixes).Fixes(), err
}

// TrackDevices are the devices that have a track.
func (s *Store) TrackDevices() ([]incident.DeviceID, error) {
	var out []incident.DeviceID
	err := s.tracks.view(func(b *bbolt.Bucket) error {
		c := b.Cursor()
		for k, _ := c.First(); k != nil; {
			device, _ := splitKey(k)
			out = append(out, incident.DeviceID(device))
			k, _ = c.Seek([]byte(device + "\x01"))
		}
		return nil
	})
	return out, err
}

func (t *tracks) view(fn func(*bbolt.Bucket) error) error {
	return t.use(func(db *bbolt.DB) error {
		return db.View(func(tx *bbolt.Tx) error { return fn(tx.Bucket(bucketTracks)) })
	})
}

// close flushes the journal and closes both files.
func (t *tracks) close() error {
	t.stop()
	t.back.Wait()
	t.mu.Lock()
	defer t.mu.Unlock()
	t.state.Lock()
	db, broken, failed := t.db, t.broken, t.failed
	t.db, t.broken = nil, nil
	t.state.Unlock()
	closeFailed(broken)
	var err error
	if t.out.f != nil {
		if failed == nil {
			err = t.out.f.Sync()
		}
		err = errors.Join(err, t.out.f.Close())
	}
	if failed != nil || db == nil {
		closeFailed(db)
		return nil // it was said when it happened
	}
	return errors.Join(err, db.Close())
}

// makeFile makes an empty tracks.db, whole or not at all.
func (t *tracks) makeFile(path string) error {
	tmp := path + staged
	if err := removeIf(t.fs, tmp); err != nil {
		return err
	}
	db, err := bbolt.Open(tmp, 0o600, boltOptions(false, 0))
	if err != nil {
		return err
	}
	err = db.Update(func(tx *bbolt.Tx) error {
		_, err := tx.CreateBucketIfNotExists(bucketTracks)
		return err
	})
	if err = errors.Join(err, db.Close()); err != nil {
		return err
	}
	return move(t.fs, tmp, path)
}

// openJournal opens the journal of tracks, and makes it when there is none.
func (t *tracks) openJournal(o *opening) error {
	if head, err := readHead(t.journal); err != nil {
		return err
	} else if _, _, ok := parseHeader(head); !ok {
		if err := o.aside(t.journal, "bad"); err != nil {
			return err
		}
		if err := writeFile(t.fs, t.journal, header(newEpoch())); err != nil {
			return err
		}
	}
	f, err := t.fs.Append(t.journal)
	t.out = journal{f: f}
	return err
}

// readHead reads the first bytes of a file; none when there is no file.
func readHead(path string) ([]byte, error) {
	f, err := os.Open(path)
	if errors.Is(err, os.ErrNotExist) {
		return nil, nil
	}
	if err != nil {
		return nil, err
	}
	defer f.Close()
	head := make([]byte, headerLen)
	n, _ := f.Read(head)
	return head[:n], nil
}
