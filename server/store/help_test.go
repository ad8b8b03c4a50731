package store

import (
	"encoding/binary"
	"flag"
	"hash/crc32"
	"os"
	"strconv"
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

// quickDir is a folder in memory, where there is one, for tests that make
// their faults themselves and open hundreds of stores.
func quickDir(t *testing.T) string {
	t.Helper()
	dir, err := os.MkdirTemp("/dev/shm", "store")
	if err != nil {
		return t.TempDir()
	}
	t.Cleanup(func() { _ = os.RemoveAll(dir) })
	return dir
}

// seal puts the right checksum before the rest of a block.
func seal(rest []byte) []byte {
	out := append(make([]byte, 4), rest...)
	binary.BigEndian.PutUint32(out, crc32.Checksum(rest, crcTable))
	return out
}

// checks sets how many cases rapid draws in this test.
func checks(t *testing.T, n int) {
	t.Helper()
	f := flag.Lookup("rapid.checks")
	before := f.Value.String()
	if err := f.Value.Set(strconv.Itoa(n)); err != nil {
		t.Fatal(err)
	}
	t.Cleanup(func() { _ = f.Value.Set(before) })
}
