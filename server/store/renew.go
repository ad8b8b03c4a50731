package store

import (
	"errors"
	"fmt"
	"path/filepath"
	"time"

	"go.etcd.io/bbolt"
)

// Renew makes a store that had failed write again, on fresh files made from
// what was acknowledged; the failed ones are set aside. After a full disk it
// needs room for that first. A store that writes is left as it is.
func (s *Store) Renew() error {
	s.mu.Lock()
	defer s.mu.Unlock()
	if err := s.status.refused(); err != nil {
		if err := s.renewLog(); err != nil {
			return fmt.Errorf("go on with fresh files: %w", classify(err))
		}
	}
	if err := s.tracks.renew(); err != nil {
		return fmt.Errorf("go on with fresh files for positions: %w", classify(err))
	}
	return nil
}

func (s *Store) renewLog() error {
	s.status.mu.Lock()
	closed := s.status.closed
	s.status.mu.Unlock()
	if closed {
		return errors.New("the store is closed")
	}
	o := &opening{
		opt: s.opt, db: filepath.Join(s.opt.Dir, dbName), journal: filepath.Join(s.opt.JournalDir, journalName),
	}
	db, f, err := o.write(collected{
		im: s.image(), remakeFile: true, why: "failed", remakeJournal: true, whyJournal: "failed",
	})
	if err != nil {
		return err
	}
	old, oldJournal := s.db, s.journal
	s.db, s.journal = db, journal{f: f}
	s.status.renewed()
	s.log.Warn("the store writes again, on fresh files", "aside", o.report.Aside)
	closeFailed(old)
	if oldJournal.f != nil {
		_ = oldJournal.f.Close()
	}
	return nil
}

// markFailed leaves word for the next opening that the files are not to be
// trusted. On a disk that is gone this cannot be, and then there is nothing
// to open either.
func (s *Store) markFailed() {
	path := filepath.Join(s.opt.Dir, failedName)
	if err := writeFile(s.opt.FS, path, []byte("A flush failed. The files are copied at the next start, not used.\n")); err != nil {
		s.log.Warn("leave word that a flush failed", "error", err)
	}
}

// closeFailed closes a bbolt file after a failure. After a fault bbolt may hold
// its own locks for ever; the file is then left to the end of the process.
func closeFailed(db *bbolt.DB) {
	if db == nil {
		return
	}
	done := make(chan struct{})
	go func() {
		defer close(done)
		_ = guarded(db.Close)
	}()
	select {
	case <-done:
	case <-time.After(time.Second):
	}
}

// Close flushes what is open and lets go of the folder.
func (s *Store) Close() error {
	wasOpen, wrote := s.status.close()
	if !wasOpen {
		return nil
	}
	s.mu.Lock() // a commit under way ends first
	defer s.mu.Unlock()
	err := s.tracks.close()
	if s.journal.f != nil {
		err = errors.Join(err, s.journal.f.Close())
	}
	if wrote {
		err = errors.Join(err, s.db.Close())
	} else {
		closeFailed(s.db)
	}
	return errors.Join(err, releaseAll(s.locks))
}
