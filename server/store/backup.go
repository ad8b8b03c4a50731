package store

import (
	"errors"
	"fmt"

	"go.etcd.io/bbolt"
)

// Backup writes a copy of the store to a file while it runs: one moment of
// all events and documents, and all tracks. It is made from what was
// acknowledged, so that it also saves a store that has failed. The file is
// there whole or not at all, and opens as a store, with an epoch of its own,
// when it is put into an empty folder as wakeback.db.
func (s *Store) Backup(path string) error {
	im := s.image()
	im.epoch = newEpoch() // what is written after it is put back must not be taken for the numbers that the phones know
	tmp := path + staged
	err := removeIf(s.opt.FS, tmp)
	if err == nil {
		err = s.backupTo(tmp, im)
	}
	if err == nil {
		err = move(s.opt.FS, tmp, path)
	}
	if err != nil {
		return fmt.Errorf("back up to %s: %w", path, classify(errors.Join(err, removeIf(s.opt.FS, tmp))))
	}
	return nil
}

func (s *Store) backupTo(path string, im image) error {
	return guarded(func() error {
		db, err := bbolt.Open(path, 0o600, boltOptions(false, 0))
		if err != nil {
			return err
		}
		err = db.Update(func(tx *bbolt.Tx) error { return fillFile(tx, im) })
		if err == nil {
			err = s.tracks.copyTo(db)
		}
		return errors.Join(err, db.Close())
	})
}
