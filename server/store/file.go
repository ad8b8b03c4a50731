package store

import (
	"encoding/binary"
	"encoding/json"
	"errors"
	"fmt"

	"go.etcd.io/bbolt"

	"wakeback/search/incident"
)

// Buckets of wakeback.db. A backup has the bucket of tracks as well.
var (
	bucketMeta   = []byte("meta")   // "schema", "epoch", "head"
	bucketEvents = []byte("events") // number, 8 bytes big endian -> JSON
	bucketDocs   = []byte("docs")   // kind, 0, name -> JSON
	bucketAside  = []byte("aside")  // id, 0, hash -> JSON of a conflicting event
	bucketTracks = []byte("tracks") // in tracks.db: device, 0, start in ms -> block
	keySchema    = []byte("schema")
	keyEpoch     = []byte("epoch")
	keyHead      = []byte("head") // number of the newest change, 8 bytes
)

// boltOptions: the map freelist is the faster one for large files. It is not
// flushed, which leaves one thing less that can be torn (bbolt panics on a
// damaged one); it is found anew at opening. NoSync is never set.
func boltOptions(readOnly bool, maxSize int) *bbolt.Options {
	return &bbolt.Options{
		Timeout: lockWait, NoFreelistSync: true, FreelistType: bbolt.FreelistMapType,
		ReadOnly: readOnly, MaxSize: maxSize,
	}
}

func seqKey(n incident.Seq) []byte { return binary.BigEndian.AppendUint64(nil, uint64(n)) }

func docName(k docKey) []byte { return []byte(k.kind + "\x00" + k.name) }

func splitKey(k []byte) (kind, name string) {
	for i, b := range k {
		if b == 0 {
			return string(k[:i]), string(k[i+1:])
		}
	}
	return string(k), ""
}

// readImage reads all of wakeback.db but the tracks.
func readImage(tx *bbolt.Tx) (image, error) {
	im := image{docs: make(map[docKey][]byte)}
	if err := checkSchema(tx); err != nil {
		return im, err
	}
	meta := tx.Bucket(bucketMeta)
	im.epoch, im.head = string(meta.Get(keyEpoch)), binary.BigEndian.Uint64(meta.Get(keyHead))
	var err error
	if im.events, err = readEvents(tx.Bucket(bucketEvents)); err != nil {
		return im, err
	}
	if im.conflicts, err = readEvents(tx.Bucket(bucketAside)); err != nil {
		return im, err
	}
	return im, tx.Bucket(bucketDocs).ForEach(func(k, v []byte) error {
		kind, name := splitKey(k)
		im.docs[docKey{kind, name}] = append([]byte(nil), v...)
		if !json.Valid(v) {
			return fmt.Errorf("document %s %q is damaged", kind, name)
		}
		return nil
	})
}

func readEvents(b *bbolt.Bucket) (events []incident.Event, err error) {
	err = b.ForEach(func(_, v []byte) error {
		var e incident.Event
		if err := json.Unmarshal(v, &e); err != nil {
			return fmt.Errorf("%w: %w", errEvents, err)
		}
		events = append(events, e)
		return nil
	})
	return events, err
}

// readFile reads the image of a file that was walked before.
func readFile(path string) (im image, err error) {
	err = guarded(func() error {
		db, err := bbolt.Open(path, 0o600, boltOptions(true, 0))
		if err != nil {
			return err
		}
		defer db.Close()
		return db.View(func(tx *bbolt.Tx) error {
			im, err = readImage(tx)
			return err
		})
	})
	return im, err
}

// stageFile makes wakeback.db from an image under the name that [opening.install]
// takes it from: a power cut in the midst must not look like damage.
func (o *opening) stageFile(im image) error {
	tmp := o.db + staged
	if err := removeIf(o.opt.FS, tmp); err != nil {
		return err
	}
	db, err := bbolt.Open(tmp, 0o600, boltOptions(false, o.opt.MaxSize))
	if err != nil {
		return err
	}
	err = db.Update(func(tx *bbolt.Tx) error { return fillFile(tx, im) })
	if err = errors.Join(err, db.Close()); err != nil {
		return fmt.Errorf("make %s: %w", o.db, err)
	}
	return nil
}

func fillFile(tx *bbolt.Tx, im image) error {
	for _, name := range [][]byte{bucketMeta, bucketEvents, bucketDocs, bucketAside} {
		if _, err := tx.CreateBucketIfNotExists(name); err != nil {
			return err
		}
	}
	return errors.Join(putSchema(tx, schema), putImage(tx, im, 0))
}

// putImage writes an image into the file, its events from one on.
func putImage(tx *bbolt.Tx, im image, from int) error {
	return errors.Join(
		tx.Bucket(bucketMeta).Put(keyEpoch, []byte(im.epoch)),
		putHead(tx, im.head),
		putDocs(tx, im.docs),
		putEvents(tx, im.events[from:]),
		putConflicts(tx, im.conflicts),
	)
}

func putEvents(tx *bbolt.Tx, events []incident.Event) error {
	b := tx.Bucket(bucketEvents)
	b.FillPercent = 0.95 // numbers only grow, so that pages are filled once
	for _, e := range events {
		text, err := json.Marshal(e)
		if err != nil {
			return fmt.Errorf("write event %s: %w", e.ID, err)
		}
		if err := b.Put(seqKey(e.Seq), text); err != nil {
			return fmt.Errorf("write event %s: %w", e.ID, err)
		}
	}
	return nil
}

func putConflicts(tx *bbolt.Tx, events []incident.Event) error {
	for _, e := range events {
		text, err := json.Marshal(e)
		if err != nil {
			return fmt.Errorf("write event %s: %w", e.ID, err)
		}
		if err := tx.Bucket(bucketAside).Put([]byte(string(e.ID)+"\x00"+e.Hash), text); err != nil {
			return fmt.Errorf("write event %s: %w", e.ID, err)
		}
	}
	return nil
}

func putHead(tx *bbolt.Tx, head uint64) error {
	return tx.Bucket(bucketMeta).Put(keyHead, binary.BigEndian.AppendUint64(nil, head))
}

// putDocs makes the documents those given.
func putDocs(tx *bbolt.Tx, docs map[docKey][]byte) error {
	b := tx.Bucket(bucketDocs)
	var gone [][]byte
	err := b.ForEach(func(k, _ []byte) error {
		kind, name := splitKey(k)
		if _, ok := docs[docKey{kind, name}]; !ok {
			gone = append(gone, append([]byte(nil), k...))
		}
		return nil
	})
	for _, k := range gone {
		err = errors.Join(err, b.Delete(k))
	}
	for k, doc := range docs {
		err = errors.Join(err, b.Put(docName(k), doc))
	}
	return err
}
