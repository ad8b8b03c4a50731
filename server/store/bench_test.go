package store

import (
	"encoding/json"
	"fmt"
	"path/filepath"
	"slices"
	"testing"
	"time"

	"go.etcd.io/bbolt"

	"wakeback/search/incident"
)

// BenchmarkAppend keeps one event in both logs, and by turns makes a bare
// bbolt commit of the same bytes, its floor: on a disk that others use too
// only the two side by side can be compared. Aim: the medians within 1.5 times.
func BenchmarkAppend(b *testing.B) {
	s, _ := open(b, Options{Dir: b.TempDir()})
	db, err := bbolt.Open(filepath.Join(b.TempDir(), "floor.db"), 0o600, boltOptions(false, 0))
	if err != nil {
		b.Fatal(err)
	}
	defer db.Close()
	c := newChain('a')
	var ours, floor []time.Duration
	timed := func(to *[]time.Duration, fn func() error) {
		begin := time.Now()
		if err := fn(); err != nil {
			b.Fatal(err)
		}
		*to = append(*to, time.Since(begin))
	}
	for b.Loop() {
		e := c.next(b, "a note of usual length about what was seen")
		text, err := json.Marshal(e)
		if err != nil {
			b.Fatal(err)
		}
		timed(&ours, func() error {
			_, err := s.Append([]incident.Event{e})
			return err
		})
		timed(&floor, func() error {
			return db.Update(func(tx *bbolt.Tx) error {
				bucket, err := tx.CreateBucketIfNotExists(bucketEvents)
				if err != nil {
					return err
				}
				return bucket.Put(seqKey(incident.Seq(e.DeviceSeq)), text)
			})
		})
	}
	report(b, ours, "append")
	report(b, floor, "floor")
	b.ReportMetric(float64(quantile(ours, 0.5))/float64(quantile(floor, 0.5)), "x-floor")
}

// BenchmarkAppendBesideTracks keeps events while fixes of five devices are
// written every few milliseconds, far more often than under way.
func BenchmarkAppendBesideTracks(b *testing.B) {
	s, _ := open(b, Options{Dir: b.TempDir()})
	c := newChain('a')
	stop, done := make(chan struct{}), make(chan struct{})
	go func() {
		defer close(done)
		for i := 0; ; i++ {
			select {
			case <-stop:
				return
			case <-time.After(5 * time.Millisecond):
			}
			fixes := steaming(t0.Add(time.Duration(i)*10*time.Second), 10)
			if err := s.AppendTrack(incident.DeviceID(fmt.Sprint("device ", i%5)), fixes); err != nil {
				b.Error(err)
				return
			}
		}
	}()
	var ours []time.Duration
	for b.Loop() {
		e := c.next(b, "a note of usual length about what was seen")
		begin := time.Now()
		if _, err := s.Append([]incident.Event{e}); err != nil {
			b.Fatal(err)
		}
		ours = append(ours, time.Since(begin))
	}
	close(stop)
	<-done
	report(b, ours, "append")
}

// BenchmarkEventsAfter reads 10,000 events from memory, in pages of 1000.
func BenchmarkEventsAfter(b *testing.B) {
	s, _ := open(b, Options{Dir: b.TempDir()})
	c := newChain('a')
	for range 100 {
		batch := make([]incident.Event, 100)
		for i := range batch {
			batch[i] = c.next(b, "a note of usual length")
		}
		keep(b, s, batch...)
	}
	b.ReportAllocs()
	for b.Loop() {
		for after := incident.Seq(0); ; {
			page, err := s.EventsAfter(after, 1000)
			if err != nil {
				b.Fatal(err)
			}
			if len(page) == 0 {
				break
			}
			after = page[len(page)-1].Seq
		}
	}
}

func report(b *testing.B, took []time.Duration, name string) {
	b.ReportMetric(float64(quantile(took, 0.5).Microseconds()), "µs/"+name+"-median")
	b.ReportMetric(float64(quantile(took, 0.99).Microseconds()), "µs/"+name+"-p99")
}

func quantile(took []time.Duration, q float64) time.Duration {
	sorted := slices.Sorted(slices.Values(took))
	return sorted[min(int(q*float64(len(sorted))), len(sorted)-1)]
}
