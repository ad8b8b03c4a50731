package store

import (
	"errors"
	"fmt"
	"os"
	"path/filepath"
	"slices"
	"testing"

	"pgregory.net/rapid"

	"wakeback/search/incident"
)

// model is what a store should hold, kept the simplest way.
type model struct {
	events []incident.Event
	docs   map[string]string
	chains []*chain
	sent   []incident.Event // all that was ever appended
}

func (m *model) has(id incident.EventID) int {
	return slices.IndexFunc(m.events, func(e incident.Event) bool { return e.ID == id })
}

// Against the model: batches with repeats and conflicts, documents, new
// starts, and the loss of either log, in any order.
func TestStoreAgainstAModel(t *testing.T) {
	checks(t, 40) // each opens its store several times, with its checkers
	root, n := quickDir(t), 0
	rapid.Check(t, func(r *rapid.T) {
		n++
		dir := filepath.Join(root, fmt.Sprint(n))
		m := &model{docs: map[string]string{}, chains: []*chain{newChain('a'), newChain('b'), newChain('c')}}
		s, _ := open(t, Options{Dir: dir})
		reopen := func(lose string) {
			closeStore(t, s)
			if lose != "" {
				if err := os.Remove(filepath.Join(dir, lose)); err != nil {
					r.Fatal(err)
				}
			}
			epoch := s.Epoch()
			s, _ = open(t, Options{Dir: dir})
			if s.Epoch() != epoch {
				r.Fatalf("another epoch after losing %q", lose)
			}
		}
		r.Repeat(map[string]func(*rapid.T){
			"append":      func(r *rapid.T) { m.append(t, r, s) },
			"conflict":    func(r *rapid.T) { m.conflict(r, s) },
			"document":    func(r *rapid.T) { m.document(r, s) },
			"append more": func(r *rapid.T) { m.append(t, r, s) },
			"start anew": func(r *rapid.T) {
				reopen(rapid.SampledFrom([]string{"", dbName, journalName}).Draw(r, "without"))
			},
			"": func(r *rapid.T) { m.compare(r, s) },
		})
		closeStore(t, s)
	})
}

// append sends some new events and some that were sent before.
func (m *model) append(t *testing.T, r *rapid.T, s *Store) {
	var batch []incident.Event
	for range rapid.IntRange(0, 5).Draw(r, "events") {
		if len(m.sent) > 0 && rapid.Bool().Draw(r, "again") {
			batch = append(batch, rapid.SampledFrom(m.sent).Draw(r, "which"))
			continue
		}
		e := rapid.SampledFrom(m.chains).Draw(r, "device").next(t, "x")
		batch = append(batch, e)
		m.sent = append(m.sent, e)
	}
	out, err := s.Append(batch)
	if err != nil || len(out) != len(batch) {
		r.Fatalf("%d of %d events: %v", len(out), len(batch), err)
	}
	for i, e := range batch {
		if m.has(e.ID) < 0 {
			m.events = append(m.events, e)
		}
		if out[i].ID != e.ID || out[i].Seq != incident.Seq(m.has(e.ID)+1) {
			r.Fatalf("event %s has number %d", e.ID, out[i].Seq)
		}
	}
}

func (m *model) conflict(r *rapid.T, s *Store) {
	if len(m.events) == 0 {
		return
	}
	e := rapid.SampledFrom(m.events).Draw(r, "which")
	e.By = "someone else"
	e, err := e.Seal()
	if err != nil {
		r.Fatal(err)
	}
	var conflict *ConflictError
	if _, err := s.Append([]incident.Event{e}); !errors.As(err, &conflict) || conflict.ID != e.ID {
		r.Fatalf("err = %v", err)
	}
}

func (m *model) document(r *rapid.T, s *Store) {
	name := rapid.SampledFrom([]string{"a", "b", "c"}).Draw(r, "name")
	if rapid.Bool().Draw(r, "delete") {
		delete(m.docs, name)
		if err := s.DeleteDoc("device", name); err != nil {
			r.Fatal(err)
		}
		return
	}
	m.docs[name] = fmt.Sprint(rapid.IntRange(0, 9).Draw(r, "doc"))
	if err := s.PutDoc("device", name, []byte(m.docs[name])); err != nil {
		r.Fatal(err)
	}
}

func (m *model) compare(r *rapid.T, s *Store) {
	got, err := s.EventsAfter(0, 1<<20)
	if err != nil || len(got) != len(m.events) || s.LastSeq() != incident.Seq(len(m.events)) {
		r.Fatalf("%d events, want %d: %v", len(got), len(m.events), err)
	}
	for i, e := range got {
		if e.ID != m.events[i].ID || e.Hash != m.events[i].Hash || e.Seq != incident.Seq(i+1) {
			r.Fatalf("event %d is %s, want %s", i+1, e.ID, m.events[i].ID)
		}
	}
	docs, err := s.Docs("device")
	if err != nil || len(docs) != len(m.docs) {
		r.Fatalf("%d documents, want %d: %v", len(docs), len(m.docs), err)
	}
	for name, doc := range m.docs {
		if string(docs[name]) != doc {
			r.Fatalf("document %s = %s, want %s", name, docs[name], doc)
		}
	}
	for _, c := range m.chains {
		if n, hash, _ := s.ChainEnd(c.device); n != c.last.DeviceSeq || hash != c.last.Hash {
			r.Fatalf("chain of %s ends at %d, want %d", c.device, n, c.last.DeviceSeq)
		}
	}
	if f := s.Findings(); len(f) != 0 {
		r.Fatalf("findings %v", f)
	}
}
