package store

import (
	"errors"
	"testing"

	"github.com/google/go-cmp/cmp"

	"wakeback/search/incident"
)

// An event that does not fit its device's chain is kept, and what does not fit
// is told; a gap that is filled later is none, also after a new start.
func TestFindings(t *testing.T) {
	dir := t.TempDir()
	s, _ := open(t, Options{Dir: dir})
	c := newChain('a')
	var e [6]incident.Event
	for i := range e {
		e[i] = c.next(t, "as it was")
	}
	set := newChain('a') // the same phone, set back to before its second event
	set.last = e[0]
	fork := set.next(t, "after being set back")
	fork.ID = "018f3c2e-ffff-7000-8000-000000000001"
	fork, err := fork.Seal()
	if err != nil {
		t.Fatal(err)
	}
	set.last = fork
	broken := set.next(t, "follows the fork") // number 3, after another second
	broken.ID, broken.DeviceSeq = "018f3c2e-ffff-7000-8000-000000000002", 7
	if broken, err = broken.Seal(); err != nil {
		t.Fatal(err)
	}

	keep(t, s, e[0], e[1], e[4])
	want := []Finding{{Gap, c.device, 3, 4, ""}}
	if diff := cmp.Diff(want, s.Findings()); diff != "" {
		t.Errorf("with a gap (-want +got):\n%s", diff)
	}
	keep(t, s, fork, e[3], e[5], e[2], broken)
	want = []Finding{
		{Fork, c.device, 2, 2, fork.ID},
		{Broken, c.device, 7, 7, broken.ID},
	}
	if diff := cmp.Diff(want, s.Findings()); diff != "" {
		t.Errorf("filled, forked and broken (-want +got):\n%s", diff)
	}
	if n, hash, _ := s.ChainEnd(c.device); n != 7 || hash != broken.Hash {
		t.Errorf("end of the chain: %d", n)
	}
	closeStore(t, s)
	s, _ = open(t, Options{Dir: dir})
	if diff := cmp.Diff(want, s.Findings()); diff != "" {
		t.Errorf("after a new start (-want +got):\n%s", diff)
	}
}

// Of a fork the event that came first stays the one that others follow.
func TestChainEndsWithTheFirstOfAFork(t *testing.T) {
	s, _ := open(t, Options{Dir: t.TempDir()})
	a, b := newChain('a'), newChain('a')
	first := a.next(t, "first")
	second := b.next(t, "second")
	second.ID = "018f3c2e-ffff-7000-8000-000000000001"
	second, err := second.Seal()
	if err != nil {
		t.Fatal(err)
	}
	keep(t, s, first, second)
	if n, hash, _ := s.ChainEnd(a.device); n != 1 || hash != first.Hash {
		t.Errorf("end of the chain: %d %s", n, hash)
	}
}

// The refused copy of a conflict is kept, once, over new starts and when the
// file is lost.
func TestConflictIsKeptAside(t *testing.T) {
	dir := t.TempDir()
	s, _ := open(t, Options{Dir: dir})
	keep(t, s, newChain('a').next(t, "as it was"))
	other := newChain('a').next(t, "as it was not")
	for range 3 {
		var conflict *ConflictError
		if _, err := s.Append([]incident.Event{other}); !errors.As(err, &conflict) {
			t.Fatal(err)
		}
	}
	for _, lose := range []string{"", dbName, journalName} {
		closeStore(t, s)
		drop(t, dir, lose)
		s, _ = open(t, Options{Dir: dir})
		if got := s.Conflicts(); len(got) != 1 || got[0].Hash != other.Hash || got[0].Seq != 0 {
			t.Errorf("without %q: conflicts %+v", lose, got)
		}
	}
}
