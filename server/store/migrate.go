package store

import (
	"errors"
	"fmt"
	"strconv"

	"go.etcd.io/bbolt"
)

// schema is the version of the layout that this program writes.
//
//	1  meta, events, docs, aside
const schema = 1

// migration brings a file from one version to the next, within one
// transaction together with all others that are due.
type migration func(*bbolt.Tx) error

// migrations[0] leads from version 1 to 2, and so on. An entry once released
// stays as it is.
var migrations = []migration{}

// errSchema is wrapped when a file is good bbolt and no store of this program.
var errSchema = errors.New("not a store of this program")

func version(tx *bbolt.Tx) (int, error) {
	meta := tx.Bucket(bucketMeta)
	if meta == nil {
		return 0, errSchema
	}
	n, err := strconv.Atoi(string(meta.Get(keySchema)))
	if err != nil || n < 1 {
		return 0, errSchema
	}
	return n, nil
}

func putSchema(tx *bbolt.Tx, n int) error {
	return tx.Bucket(bucketMeta).Put(keySchema, []byte(strconv.Itoa(n)))
}

// checkSchema reads the version; one that is too new is refused.
func checkSchema(tx *bbolt.Tx) error {
	n, err := version(tx)
	if err != nil {
		return err
	}
	if n > schema {
		return fmt.Errorf("%w (version %d, this program knows %d)", ErrNewer, n, schema)
	}
	for _, name := range [][]byte{bucketEvents, bucketDocs, bucketAside} {
		if tx.Bucket(name) == nil {
			return fmt.Errorf("%w: no bucket %s", errSchema, name)
		}
	}
	if meta := tx.Bucket(bucketMeta); !isEpoch(string(meta.Get(keyEpoch))) || len(meta.Get(keyHead)) != 8 {
		return fmt.Errorf("%w: no epoch or no head", errSchema)
	}
	return nil
}

// migrate brings an older file to a version. A file that is there already is
// not written to.
func migrate(db *bbolt.DB, steps []migration) error {
	from := 0
	err := db.View(func(tx *bbolt.Tx) (err error) {
		from, err = version(tx)
		return err
	})
	if err != nil || from > len(steps) {
		return err
	}
	return db.Update(func(tx *bbolt.Tx) error {
		for n := from; n <= len(steps); n++ {
			if err := steps[n-1](tx); err != nil {
				return fmt.Errorf("bring the store from version %d to %d: %w", n, n+1, err)
			}
		}
		return putSchema(tx, len(steps)+1)
	})
}
