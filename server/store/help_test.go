package store

import (
	"testing"

	"go.etcd.io/bbolt"
)

func setSchema(t *testing.T, path, version string) {
	t.Helper()
	db, err := bbolt.Open(path, 0o600, boltOptions(false, 0))
	if err != nil {
		t.Fatal(err)
	}
	err = db.Update(func(tx *bbolt.Tx) error { return tx.Bucket(bucketMeta).Put(keySchema, []byte(version)) })
	if err != nil {
		t.Fatal(err)
	}
	if err := db.Close(); err != nil {
		t.Fatal(err)
	}
}
