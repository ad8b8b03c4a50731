package store

import (
	"encoding/json"
	"errors"
	"fmt"
	"strings"

	"go.etcd.io/bbolt"
)

// ErrDoc is wrapped when a document or its name cannot be kept.
var ErrDoc = errors.New("a document needs a kind and a name, without zero bytes and below 256 bytes, and has to be JSON")

// longestName bounds the name of a document; our choice, a hash in
// hexadecimal has room.
const longestName = 256

// PutDoc keeps a JSON document under a kind and a name, in the place of what
// was there. It returns when it is on disk.
func (s *Store) PutDoc(kind, name string, doc []byte) error {
	if kind == "" || name == "" || len(kind)+len(name) > longestName || len(doc) > maxFrame/2 || strings.ContainsRune(kind+name, 0) || !json.Valid(doc) || string(doc) == "null" {
		return fmt.Errorf("keep document %s %q: %w", kind, name, ErrDoc)
	}
	return s.changeDoc(docChange{kind, name, append(json.RawMessage(nil), doc...)})
}

// DeleteDoc takes a document away; one that is not there is no error.
func (s *Store) DeleteDoc(kind, name string) error { return s.changeDoc(docChange{kind, name, nil}) }

func (s *Store) changeDoc(d docChange) error {
	s.mu.Lock()
	defer s.mu.Unlock()
	f, err := docFrame(s.head+1, d)
	if err != nil {
		return err
	}
	key := docKey{d.Kind, d.Name}
	err = s.commit(f, func(tx *bbolt.Tx) error {
		if d.Doc == nil {
			return tx.Bucket(bucketDocs).Delete(docName(key))
		}
		return tx.Bucket(bucketDocs).Put(docName(key), d.Doc)
	})
	if err != nil {
		return fmt.Errorf("keep document %s %q: %w", d.Kind, d.Name, err)
	}
	s.read.Lock()
	defer s.read.Unlock()
	if d.Doc == nil {
		delete(s.docs, key)
	} else {
		s.docs[key] = d.Doc
	}
	return nil
}

// Docs returns copies of all documents of a kind, by name.
func (s *Store) Docs(kind string) (map[string][]byte, error) {
	s.read.RLock()
	defer s.read.RUnlock()
	out := make(map[string][]byte)
	for k, doc := range s.docs {
		if k.kind == kind {
			out[k.name] = append([]byte(nil), doc...)
		}
	}
	return out, nil
}
