package store

import (
	"bytes"
	"cmp"
	"encoding/json"
	"errors"
	"fmt"
	"slices"

	"wakeback/search/incident"
)

// image is what a store holds but for the tracks, in memory.
type image struct {
	epoch  string
	head   uint64           // number of the newest change
	events []incident.Event // events[i] has the number i+1
	docs   map[docKey][]byte
	// conflicts are events whose id is stored with other content.
	conflicts []incident.Event
}

func (im *image) addConflicts(events ...incident.Event) {
	for _, e := range events {
		if !slices.ContainsFunc(im.conflicts, func(o incident.Event) bool { return o.ID == e.ID && o.Hash == e.Hash }) {
			im.conflicts = append(im.conflicts, e)
		}
	}
}

type docKey struct{ kind, name string }

// docChange is a document put, or deleted when Doc is null.
type docChange struct {
	Kind string          `json:"kind"`
	Name string          `json:"name"`
	Doc  json.RawMessage `json:"doc"`
}

// errEvents is wrapped when the events of a file are not as they were kept.
var errEvents = errors.New("events are damaged")

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

func (im *image) putDoc(d docChange) {
	key := docKey{d.Kind, d.Name}
	if d.Doc == nil || string(d.Doc) == "null" {
		delete(im.docs, key)
		return
	}
	im.docs[key] = d.Doc
}

// merge adds the events that the image does not have. Those whose numbers
// follow on keep them. The others get new ones, and then the numbers are no
// longer those that the phones know, so that the image needs another epoch.
func (im *image) merge(found []incident.Event) (added int, renumbered bool) {
	have := make(map[incident.EventID]bool, len(im.events)+len(found))
	for _, e := range im.events {
		have[e.ID] = true
	}
	slices.SortStableFunc(found, func(a, b incident.Event) int { return cmp.Compare(a.Seq, b.Seq) })
	for _, e := range found {
		if have[e.ID] {
			continue
		}
		have[e.ID] = true
		if next := incident.Seq(len(im.events) + 1); e.Seq != next {
			e.Seq, renumbered = next, true
		}
		im.events = append(im.events, e)
		added++
	}
	return added, renumbered
}

// content is what a journal holds.
type content struct {
	image
	all     []incident.Event // every good event in it, also behind a hole
	skipped int              // bytes that are no frame
	hole    bool             // events or changes of documents are missing
}

// errJournal is wrapped when a file is no journal.
var errJournal = errors.New("it does not begin as a journal")

// readContent reads a journal. An error wraps [errJournal], [ErrNewer], or says
// which frame cannot be read although its checksum is right.
func readContent(text []byte) (content, error) {
	c := content{image: image{docs: make(map[docKey][]byte)}}
	epoch, newer, ok := parseHeader(text)
	if newer {
		return c, fmt.Errorf("%w (its journal)", ErrNewer)
	}
	if !ok {
		return c, errJournal
	}
	c.epoch = epoch
	var bad error
	c.skipped = frames(text[headerLen:], func(f frame) {
		if err := c.apply(f); err != nil && bad == nil {
			bad = fmt.Errorf("change %d in the journal: %w", f.change, err)
		}
	})
	_, renumbered := c.merge(slices.Clone(c.all))
	if renumbered {
		c.hole = true
		c.events = upToHole(c.all)
	}
	return c, bad
}

// upToHole is the events from number 1 on, to the first that is missing.
func upToHole(sorted []incident.Event) (whole []incident.Event) {
	slices.SortStableFunc(sorted, func(a, b incident.Event) int { return cmp.Compare(a.Seq, b.Seq) })
	for _, e := range sorted {
		if e.Seq == incident.Seq(len(whole)+1) {
			whole = append(whole, e)
		}
	}
	return whole
}

// apply adds one frame.
func (c *content) apply(f frame) error {
	if f.change > c.head+1 {
		c.hole = true
	}
	c.head = max(c.head, f.change)
	switch f.kind {
	case frameEvents:
		var events []incident.Event
		if err := json.Unmarshal(f.payload, &events); err != nil {
			return err
		}
		for _, e := range events {
			if err := e.Verify(); err != nil {
				return err
			}
			c.all = append(c.all, e)
		}
	case frameConflict:
		var events []incident.Event
		if err := json.Unmarshal(f.payload, &events); err != nil {
			return err
		}
		c.addConflicts(events...)
	case frameDoc:
		var d docChange
		if err := json.Unmarshal(f.payload, &d); err != nil {
			return err
		}
		c.putDoc(d)
	case frameDocs:
		var docs []docChange
		if err := json.Unmarshal(f.payload, &docs); err != nil {
			return err
		}
		clear(c.docs)
		for _, d := range docs {
			c.putDoc(d)
		}
		c.hole = false // of documents nothing is missing from here on
	}
	return nil
}

// carve finds events in a file that cannot be read in order, wherever they
// stand in it: each is JSON with its own hash, so that what is found is
// genuine.
func carve(text []byte) (found []incident.Event) {
	const most = 256 << 10 // of one event; longer ones are refused at the door
	start := []byte(`{"id":"`)
	for {
		at := bytes.Index(text, start)
		if at < 0 {
			return found
		}
		text = text[at:]
		var e incident.Event
		err := json.NewDecoder(bytes.NewReader(text[:min(len(text), most)])).Decode(&e)
		if err == nil && e.Seq > 0 && e.Verify() == nil {
			found = append(found, e)
		}
		text = text[len(start):]
	}
}

func eventsFrame(kind byte, change uint64, events []incident.Event) (frame, error) {
	payload, err := json.Marshal(events)
	if err != nil {
		return frame{}, fmt.Errorf("write %d events: %w", len(events), err)
	}
	return frame{kind, change, payload}, nil
}

func docFrame(change uint64, d docChange) (frame, error) {
	payload, err := json.Marshal(d)
	if err != nil {
		return frame{}, fmt.Errorf("write document %s %q: %w", d.Kind, d.Name, err)
	}
	return frame{frameDoc, change, payload}, nil
}

// docsFrame holds all documents.
func docsFrame(im image) (frame, error) {
	all := make([]docChange, 0, len(im.docs))
	for k, doc := range im.docs {
		all = append(all, docChange{k.kind, k.name, doc})
	}
	payload, err := json.Marshal(all)
	if err != nil {
		return frame{}, fmt.Errorf("write %d documents: %w", len(all), err)
	}
	return frame{frameDocs, im.head, payload}, nil
}

// framesOf is all documents and conflicts, and the events from one on, as frames. The
// documents come first: what follows then has no change before it missing.
func framesOf(im image, from int) ([]frame, error) {
	const most = 100 // events in a frame, as in a batch
	f, err := docsFrame(im)
	if err != nil {
		return nil, err
	}
	out := []frame{f}
	if len(im.conflicts) > 0 {
		f, err := eventsFrame(frameConflict, im.head, im.conflicts)
		if err != nil {
			return nil, err
		}
		out = append(out, f)
	}
	for ; from < len(im.events); from += most {
		f, err := eventsFrame(frameEvents, im.head, im.events[from:min(from+most, len(im.events))])
		if err != nil {
			return nil, err
		}
		out = append(out, f)
	}
	return out, nil
}

func sameDocs(a, b map[docKey][]byte) bool {
	if len(a) != len(b) {
		return false
	}
	for k, doc := range a {
		if other, ok := b[k]; !ok || !bytes.Equal(doc, other) {
			return false
		}
	}
	return true
}
