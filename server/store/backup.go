package store

import (
	"errors"
	"fmt"
	"os"
	"path/filepath"

	"go.etcd.io/bbolt"
)

// Backup writes a copy of the store to a file while it runs: one moment of
// all events, documents and tracks. The file is there whole or not at all, and
// opens as a store, with an epoch of its own, when it is put into a folder as
// wakeback.db without the journal of another.
func (s *Store) Backup(path string) error {
	tmp := path + ".new"
	err := s.view(func(tx *bbolt.Tx) error {
		f, err := os.OpenFile(tmp, os.O_CREATE|os.O_EXCL|os.O_WRONLY, 0o600)
		if err != nil {
			return err
		}
		_, err = tx.WriteTo(f)
		return errors.Join(err, f.Sync(), f.Close())
	})
	if err == nil {
		err = renew(tmp)
	}
	if err == nil {
		err = os.Rename(tmp, path)
	}
	if err != nil {
		return fmt.Errorf("back up to %s: %w", path, classify(errors.Join(err, removeIf(tmp))))
	}
	return syncDir(filepath.Dir(path))
}

// renew gives a copy an epoch of its own: what is written after it is put back
// must not be taken for the numbers that the phones know.
func renew(path string) error {
	db, err := bbolt.Open(path, 0o600, boltOptions(false, 0))
	if err != nil {
		return err
	}
	err = db.Update(func(tx *bbolt.Tx) error {
		return tx.Bucket(bucketMeta).Put(keyEpoch, []byte(newEpoch()))
	})
	return errors.Join(err, db.Close())
}

func removeIf(path string) error {
	if err := os.Remove(path); err != nil && !errors.Is(err, os.ErrNotExist) {
		return err
	}
	return nil
}
