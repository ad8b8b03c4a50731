package store

import (
	"encoding/json"
	"errors"
	"fmt"

	"wakeback/search/incident"
)

// image is what a store holds but for the tracks, in memory: read from the
// bbolt file or from the journal, and compared.
type image struct {
	epoch  string
	head   uint64 // number of the newest change
	events []incident.Event
	docs   map[docKey][]byte
	tracks []trackChange // of a journal only
}

type docKey struct{ kind, name string }

// docChange is a document put, or deleted when Doc is null.
type docChange struct {
	Kind string          `json:"kind"`
	Name string          `json:"name"`
	Doc  json.RawMessage `json:"doc"`
}

// errEvents is wrapped when the events of an image are not as they were kept.
var errEvents = errors.New("events are damaged")

// imageOf reads the frames of a journal.
func imageOf(s scan) (image, error) {
	im := image{epoch: s.epoch, docs: make(map[docKey][]byte)}
	for i, f := range s.frames {
		if err := im.apply(f); err != nil {
			return im, fmt.Errorf("journal frame %d: %w", i+1, err)
		}
	}
	return im, im.verify()
}

func (im *image) apply(f frame) error {
	im.head = max(im.head, f.change)
	switch f.kind {
	case frameEvents:
		var events []incident.Event
		if err := json.Unmarshal(f.payload, &events); err != nil {
			return err
		}
		for _, e := range events {
			// A frame can stand twice: the commit it belongs to was caught up after
			// a crash. The number tells.
			if int(e.Seq) == len(im.events)+1 {
				im.events = append(im.events, e)
			} else if int(e.Seq) > len(im.events)+1 {
				return fmt.Errorf("%w: number %d after %d", errEvents, e.Seq, len(im.events))
			}
		}
	case frameDoc:
		var d docChange
		if err := json.Unmarshal(f.payload, &d); err != nil {
			return err
		}
		im.putDoc(d)
	case frameTrack:
		var t trackChange
		if err := json.Unmarshal(f.payload, &t); err != nil {
			return err
		}
		im.tracks = append(im.tracks, t)
	}
	return nil // a kind of a later version is left alone
}

func (im *image) putDoc(d docChange) {
	key := docKey{d.Kind, d.Name}
	if d.Doc == nil || string(d.Doc) == "null" {
		delete(im.docs, key)
		return
	}
	im.docs[key] = d.Doc
}

// verify checks numbers and hashes of all events.
func (im *image) verify() error {
	for i, e := range im.events {
		if int(e.Seq) != i+1 {
			return fmt.Errorf("%w: number %d where %d belongs", errEvents, e.Seq, i+1)
		}
		if err := e.Verify(); err != nil {
			return fmt.Errorf("%w: number %d: %w", errEvents, e.Seq, err)
		}
	}
	return nil
}

func eventsFrame(change uint64, events []incident.Event) (frame, error) {
	payload, err := json.Marshal(events)
	if err != nil {
		return frame{}, fmt.Errorf("write %d events: %w", len(events), err)
	}
	return frame{frameEvents, change, payload}, nil
}

func docFrame(change uint64, d docChange) (frame, error) {
	payload, err := json.Marshal(d)
	if err != nil {
		return frame{}, fmt.Errorf("write document %s %q: %w", d.Kind, d.Name, err)
	}
	return frame{frameDoc, change, payload}, nil
}
