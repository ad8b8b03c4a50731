package store

import (
	"encoding/json"
	"path/filepath"
	"testing"

	"go.etcd.io/bbolt"

	"wakeback/search/incident"
)

// BenchmarkAppend keeps one event in both logs; its floor is a bare bbolt
// commit of the same bytes, in the same run. Aim: within 1.5 times.
func BenchmarkAppend(b *testing.B) {
	b.Run("both logs", func(b *testing.B) {
		s, _ := open(b, Options{Dir: b.TempDir()})
		c := newChain('a')
		events := make([]incident.Event, 0, b.N)
		for b.Loop() {
			b.StopTimer()
			events = append(events[:0], c.next(b, "a note of usual length about what was seen"))
			b.StartTimer()
			if _, err := s.Append(events); err != nil {
				b.Fatal(err)
			}
		}
	})
	b.Run("floor: bare bbolt commit", func(b *testing.B) {
		db, err := bbolt.Open(filepath.Join(b.TempDir(), "floor.db"), 0o600, boltOptions(false, 0))
		if err != nil {
			b.Fatal(err)
		}
		defer db.Close()
		c := newChain('a')
		text, err := json.Marshal(c.next(b, "a note of usual length about what was seen"))
		if err != nil {
			b.Fatal(err)
		}
		n := incident.Seq(0)
		for b.Loop() {
			n++
			err := db.Update(func(tx *bbolt.Tx) error {
				bucket, err := tx.CreateBucketIfNotExists(bucketEvents)
				if err != nil {
					return err
				}
				return bucket.Put(seqKey(n), text)
			})
			if err != nil {
				b.Fatal(err)
			}
		}
	})
}
