package store

import (
	"encoding/binary"
	"encoding/json"
	"errors"
	"fmt"
	"strconv"
	"time"

	"go.etcd.io/bbolt"

	"wakeback/search/incident"
)

// Buckets of the bbolt file.
var (
	bucketMeta   = []byte("meta")   // "schema", "epoch", "head"
	bucketEvents = []byte("events") // number, 8 bytes big endian -> JSON
	bucketDocs   = []byte("docs")   // kind, 0, name -> JSON
	bucketTracks = []byte("tracks") // device, 0, start in ms, 8 bytes -> block
	bucketAside  = []byte("aside")  // id, 0, hash -> JSON of a conflicting event
	keySchema    = []byte("schema")
	keyEpoch     = []byte("epoch")
	keyHead      = []byte("head") // number of the newest change, 8 bytes
)

// schema is the version of the layout that this program writes.
const schema = 1

// migrations lead from each version to the next: migrations[0] from 1 to 2.
var migrations []func(*bbolt.Tx) error

// lockWait is how long opening waits for another process to let go.
const lockWait = time.Second

// boltOptions: the map freelist is the faster for large files, and not
// flushing it leaves one thing less that can be torn; it is found anew at
// opening.
func boltOptions(readOnly bool, maxSize int) *bbolt.Options {
	return &bbolt.Options{
		Timeout: lockWait, NoFreelistSync: true, FreelistType: bbolt.FreelistMapType,
		ReadOnly: readOnly, MaxSize: maxSize,
	}
}

func seqKey(n incident.Seq) []byte { return binary.BigEndian.AppendUint64(nil, uint64(n)) }

func docName(k docKey) []byte { return []byte(k.kind + "\x00" + k.name) }

// readImage walks the whole file. It is meant for a process of its own, since
// bbolt can end its process on a damaged page.
func readImage(db *bbolt.DB) (image, error) {
	im := image{docs: make(map[docKey][]byte)}
	err := db.View(func(tx *bbolt.Tx) error {
		for err := range tx.Check() {
			return fmt.Errorf("the file's own check: %w", err)
		}
		if err := checkSchema(tx); err != nil {
			return err
		}
		meta := tx.Bucket(bucketMeta)
		im.epoch, im.head = string(meta.Get(keyEpoch)), binary.BigEndian.Uint64(meta.Get(keyHead))
		if err := im.readEvents(tx); err != nil {
			return err
		}
		if err := readTracks(tx); err != nil {
			return err
		}
		return tx.Bucket(bucketDocs).ForEach(func(k, v []byte) error {
			kind, name := splitKey(k)
			im.docs[docKey{kind, name}] = append([]byte(nil), v...)
			return nil
		})
	})
	return im, err
}

func (im *image) readEvents(tx *bbolt.Tx) error {
	return tx.Bucket(bucketEvents).ForEach(func(k, v []byte) error {
		var e incident.Event
		if err := json.Unmarshal(v, &e); err != nil {
			return fmt.Errorf("%w: %w", errEvents, err)
		}
		im.events = append(im.events, e)
		return nil
	})
}

func splitKey(k []byte) (kind, name string) {
	for i, b := range k {
		if b == 0 {
			return string(k[:i]), string(k[i+1:])
		}
	}
	return string(k), ""
}

var errSchema = errors.New("not a store of this program")

// checkSchema reads the version; one that is too new is refused.
func checkSchema(tx *bbolt.Tx) error {
	meta := tx.Bucket(bucketMeta)
	if meta == nil {
		return errSchema
	}
	n, err := strconv.Atoi(string(meta.Get(keySchema)))
	if err != nil || n < 1 {
		return errSchema
	}
	if n > schema {
		return fmt.Errorf("%w (version %d, this program knows %d)", ErrNewer, n, schema)
	}
	for _, name := range [][]byte{bucketEvents, bucketDocs, bucketTracks, bucketAside} {
		if tx.Bucket(name) == nil {
			return fmt.Errorf("%w: no bucket %s", errSchema, name)
		}
	}
	if len(meta.Get(keyEpoch)) != 32 || len(meta.Get(keyHead)) != 8 {
		return fmt.Errorf("%w: no epoch or no head", errSchema)
	}
	return nil
}

// migrate brings an older file to this program's version, in one transaction.
func migrate(db *bbolt.DB) error {
	return db.Update(func(tx *bbolt.Tx) error {
		meta := tx.Bucket(bucketMeta)
		n, err := strconv.Atoi(string(meta.Get(keySchema)))
		if err != nil {
			return errSchema
		}
		for ; n < schema; n++ {
			if err := migrations[n-1](tx); err != nil {
				return fmt.Errorf("bring the store from version %d to %d: %w", n, n+1, err)
			}
		}
		return meta.Put(keySchema, []byte(strconv.Itoa(schema)))
	})
}

// create fills a new file with an image.
func create(db *bbolt.DB, im image) error {
	return db.Update(func(tx *bbolt.Tx) error {
		for _, name := range [][]byte{bucketMeta, bucketEvents, bucketDocs, bucketTracks, bucketAside} {
			if _, err := tx.CreateBucketIfNotExists(name); err != nil {
				return err
			}
		}
		meta := tx.Bucket(bucketMeta)
		err := errors.Join(
			meta.Put(keySchema, []byte(strconv.Itoa(schema))),
			meta.Put(keyEpoch, []byte(im.epoch)),
			putHead(tx, im.head),
			putDocs(tx, im.docs),
		)
		for _, t := range im.tracks {
			err = errors.Join(err, putTrack(tx, t.Device, t.fixes()))
		}
		return errors.Join(err, putEvents(tx, im.events))
	})
}

func putEvents(tx *bbolt.Tx, events []incident.Event) error {
	b := tx.Bucket(bucketEvents)
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
