package store

import (
	"bytes"
	"context"
	"errors"
	"fmt"
	"os"
	"path/filepath"
	"time"

	"go.etcd.io/bbolt"

	"wakeback/drift/nav"
)

// open opens the tracks after a checker has walked them. It never fails: what
// goes wrong is told, and marks are kept without tracks. main is wakeback.db,
// which holds tracks when it was a backup.
func (t *tracks) open(v verdict, main *bbolt.DB, o *opening) {
	err := t.openFiles(v, main, o)
	if err != nil {
		t.fail(err)
		o.warn("Positions are not recorded (%v). Marks are kept all the same.", classify(err))
	}
}

func (t *tracks) openFiles(v verdict, main *bbolt.DB, o *opening) error {
	if main == nil {
		return t.openToRead(v)
	}
	again := v.State != good && exists(t.journal)
	switch v.State {
	case absent:
	case good:
	case damaged:
		o.warn("The file of positions was damaged and is set aside (%s).", v.Problem)
		if err := o.aside(t.path, "bad"); err != nil {
			return err
		}
	default:
		return errors.New(v.Problem)
	}
	if v.State != good {
		if err := t.makeFile(t.path); err != nil {
			return err
		}
	}
	db, err := bbolt.Open(t.path, 0o600, boltOptions(false, 0))
	if err != nil {
		return err
	}
	t.db = db
	if again {
		t.readBack(o)
	}
	if err := t.openJournal(o); err != nil {
		return err
	}
	return t.takeFrom(main)
}

// openToRead opens what there is on a disk that cannot be written to.
func (t *tracks) openToRead(v verdict) error {
	if v.State == good {
		db, err := bbolt.Open(t.path, 0o600, boltOptions(true, 0))
		if err != nil {
			return err
		}
		t.db = db
	}
	return ErrReadOnly
}

// takeFrom moves the tracks that a backup brought into their own file.
func (t *tracks) takeFrom(main *bbolt.DB) error {
	there := false
	err := main.View(func(tx *bbolt.Tx) error {
		there = tx.Bucket(bucketTracks) != nil
		return nil
	})
	if err != nil || !there {
		return err
	}
	if err := copyBlocks(t.db, main); err != nil {
		return fmt.Errorf("take over the tracks of the backup: %w", err)
	}
	return main.Update(func(tx *bbolt.Tx) error { return tx.DeleteBucket(bucketTracks) })
}

// copyTo copies all blocks into a bucket of another file.
func (t *tracks) copyTo(to *bbolt.DB) error {
	t.state.RLock()
	none := t.db == nil
	t.state.RUnlock()
	if none {
		return nil
	}
	return t.use(func(db *bbolt.DB) error { return copyBlocks(to, db) })
}

// copyStep bounds one transaction of copying, in blocks: some 4 MB.
const copyStep = 500

func copyBlocks(to, from *bbolt.DB) error {
	return from.View(func(tx *bbolt.Tx) error {
		c := tx.Bucket(bucketTracks).Cursor()
		k, v := c.First()
		for first := true; first || k != nil; first = false {
			err := to.Update(func(tx *bbolt.Tx) error {
				b, err := tx.CreateBucketIfNotExists(bucketTracks)
				for n := 0; err == nil && k != nil && n < copyStep; n++ {
					err = addBlock(b, k, v)
					k, v = c.Next()
				}
				return err
			})
			if err != nil {
				return err
			}
		}
		return nil
	})
}

// addBlock puts a block where another may be.
func addBlock(b *bbolt.Bucket, k, v []byte) error {
	old := b.Get(k)
	if old == nil || bytes.Equal(old, v) {
		return b.Put(k, v)
	}
	device, _ := splitKey(k)
	fixes, err := decodeFixes(v)
	if err != nil || len(fixes) == 0 {
		return nil // where there is a good one, one that does not check is not missed
	}
	return putTrack(b, device, fixes)
}

// readBackTime is how long opening waits for tracks to be read back; the rest
// follows while the server runs. Our choice: within it the newest hours, which
// are read first, are there, and the start stays below five seconds.
const readBackTime = time.Second

// readBack puts what the journal holds into the file, newest first.
func (t *tracks) readBack(o *opening) {
	ctx, cancel := context.WithCancel(context.Background())
	t.stop = cancel
	done := make(chan int, 1)
	t.back.Go(func() { done <- t.restore(ctx) })
	select {
	case n := <-done:
		if n > 0 {
			o.warn("The positions were read back from their journal.")
		}
	case <-time.After(readBackTime):
		o.warn("The positions are being read back from their journal; the newest are there already.")
	}
}

// restoreStep bounds one transaction of reading back, in frames.
const restoreStep = 500

func (t *tracks) restore(ctx context.Context) (done int) {
	payloads := t.journaled()
	for end := len(payloads); end > 0 && ctx.Err() == nil; end -= restoreStep {
		if err := t.restoreSome(payloads[max(0, end-restoreStep):end]); err != nil {
			t.log.Error("read back positions", "error", err)
			return done
		}
		done = len(payloads) - max(0, end-restoreStep)
	}
	t.log.Info("read back positions", "entries", done, "of", len(payloads))
	return done
}

// journaled is all frames of the journal, and of those that were set aside
// when they failed.
func (t *tracks) journaled() (payloads [][]byte) {
	older, _ := filepath.Glob(t.journal + ".failed-*") // the pattern is good
	for _, path := range append(older, t.journal) {
		text, err := os.ReadFile(path)
		if err != nil {
			t.log.Error("read back positions", "error", err)
			continue
		}
		frames(text, func(f frame) {
			if f.kind == frameTrack {
				payloads = append(payloads, f.payload)
			}
		})
	}
	return payloads
}

func (t *tracks) restoreSome(payloads [][]byte) error {
	found := make(map[string][]nav.Fix)
	for _, p := range payloads {
		if device, fixes, err := readTrackFrame(p); err == nil {
			found[device] = append(found[device], fixes...)
		}
	}
	t.mu.Lock()
	defer t.mu.Unlock()
	return t.use(func(db *bbolt.DB) error {
		return db.Update(func(tx *bbolt.Tx) error {
			for device, fixes := range found {
				if err := putTrack(tx.Bucket(bucketTracks), device, nav.NewTrack(fixes).Fixes()); err != nil {
					return err
				}
			}
			return nil
		})
	})
}

// renew makes tracks that had failed be recorded again, in a fresh file with
// what the failed one held, as far as it can be read.
func (t *tracks) renew() error {
	if t.problem() == nil {
		return nil
	}
	t.mu.Lock()
	defer t.mu.Unlock()
	fresh := t.path + ".renewed"
	if err := errors.Join(removeIf(t.fs, fresh), t.makeFile(fresh)); err != nil {
		return err
	}
	db, err := bbolt.Open(fresh, 0o600, boltOptions(false, 0))
	if err != nil {
		return err
	}
	if err := t.copyTo(db); err != nil {
		t.log.Error("copy positions to a fresh file", "error", err)
		if errors.Is(classify(err), ErrDiskFull) {
			return errors.Join(err, db.Close(), removeIf(t.fs, fresh))
		}
	}
	return t.swap(db, fresh)
}

// swap goes on with a fresh file. The old one is kept, and so is the journal.
func (t *tracks) swap(db *bbolt.DB, fresh string) error {
	o := &opening{opt: Options{FS: t.fs, Now: t.now, Log: t.log, Dir: filepath.Dir(t.path)}}
	err := errors.Join(o.aside(t.path, "failed"), o.aside(t.journal, "failed"), move(t.fs, fresh, t.path))
	old := t.out
	if err == nil {
		err = t.openJournal(o)
	}
	if err != nil {
		return errors.Join(err, db.Close())
	}
	t.state.Lock()
	was, broken := t.db, t.broken
	t.db, t.broken, t.failed = db, nil, nil
	t.state.Unlock()
	closeFailed(was)
	closeFailed(broken)
	if old.f != nil {
		_ = old.f.Close()
	}
	return nil
}
