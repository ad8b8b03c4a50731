package store

import (
	"bytes"
	"fmt"
	"os"
	"path/filepath"
	"slices"
	"strings"
	"testing"
	"time"

	"wakeback/search/incident"
)

// drop removes a file of a store; "" is none.
func drop(t *testing.T, dir, name string) {
	t.Helper()
	if name == "" {
		return
	}
	if err := os.Remove(filepath.Join(dir, name)); err != nil {
		t.Fatal(err)
	}
}

// Both copies are damaged, at different places: every event that stands whole
// in either of them is kept, the numbers begin anew, and it is said.
func TestWhatStandsInEitherLogIsKept(t *testing.T) {
	dir := t.TempDir()
	want := filled(t, dir, 40)
	db, journal := slurp(t, dir, dbName), slurp(t, dir, journalName)
	clear(db[:3*os.Getpagesize()]) // both metas: bbolt finds nothing any more
	at := bytes.Index(journal, []byte(want[10].ID))
	journal[at+200] ^= 1
	put(t, dir, dbName, db)
	put(t, dir, journalName, journal)
	s, r := open(t, Options{Dir: dir})
	got := all(t, s)
	if len(got) != len(want) || len(r.Warnings) == 0 || len(r.Aside) == 0 {
		t.Fatalf("%d of %d events, %+v", len(got), len(want), r)
	}
	for i, e := range got {
		if e.Hash != want[i].Hash || e.Seq != incident.Seq(i+1) {
			t.Fatalf("event %d is another", i+1)
		}
	}
	keep(t, s, newChain('b').next(t, "goes on"))
	closeStore(t, s)
	if _, r = open(t, Options{Dir: dir}); r.Mode != Normal || r.Events != len(want)+1 {
		t.Errorf("the start after: %+v", r)
	}
}

// Only one log is left and it is damaged: what is whole in it is kept, under
// another epoch, since the numbers are no longer those that phones know.
func TestOneDamagedLogIsLeft(t *testing.T) {
	for _, name := range []string{dbName, journalName} {
		dir := t.TempDir()
		want := filled(t, dir, 40)
		s, _ := open(t, Options{Dir: dir})
		epoch := s.Epoch()
		closeStore(t, s)
		text := slurp(t, dir, name)
		// The copy that counts is the last that stands in the file.
		for at, from := 0, 0; ; from = at + 1 {
			next := bytes.Index(text[from:], []byte(want[7].ID))
			if next < 0 {
				break
			}
			at = from + next
			text[at+200] ^= 1
		}
		drop(t, dir, dbName)
		drop(t, dir, journalName)
		put(t, dir, name, text)
		s, r := open(t, Options{Dir: dir})
		got := all(t, s)
		if r.Mode != Emptied || len(got) != len(want)-1 || s.Epoch() == epoch {
			t.Errorf("%s: mode %s, %d of %d events, same epoch %t", name, r.Mode, len(got), len(want), s.Epoch() == epoch)
		}
		if f := s.Findings(); len(f) != 1 || f[0].Kind != Gap || f[0].From != 8 || f[0].To != 8 {
			t.Errorf("%s: findings %+v", name, f)
		}
		keep(t, s, want[7]) // the phone sends it again
		if f := s.Findings(); len(f) != 0 {
			t.Errorf("%s: findings after the phone sent it again: %+v", name, f)
		}
		closeStore(t, s)
	}
}

// File and journal were both written to apart from one another, as when an
// old copy of one was put back: nothing of either is lost.
func TestLogsThatWentApart(t *testing.T) {
	dir := t.TempDir()
	filled(t, dir, 3)
	oldDB, oldJournal := slurp(t, dir, dbName), slurp(t, dir, journalName)
	more := func(letter byte) (db, journal []byte) {
		put(t, dir, dbName, oldDB)
		put(t, dir, journalName, oldJournal)
		s, _ := open(t, Options{Dir: dir})
		keep(t, s, newChain(letter).next(t, "apart"))
		closeStore(t, s)
		return slurp(t, dir, dbName), slurp(t, dir, journalName)
	}
	db, _ := more('b')
	_, journal := more('c')
	put(t, dir, dbName, db)
	put(t, dir, journalName, journal)
	s, r := open(t, Options{Dir: dir})
	devices := map[incident.DeviceID]bool{}
	for _, e := range all(t, s) {
		devices[e.Device] = true
	}
	if r.Mode != Emptied || len(all(t, s)) != 5 || len(devices) != 3 {
		t.Errorf("%+v, %d events of %d devices", r, len(all(t, s)), len(devices))
	}
}

// A journal of another vessel, as on a stick that was taken along, is set
// aside, and nothing of it comes into this log.
func TestForeignJournal(t *testing.T) {
	mine, other := t.TempDir(), t.TempDir()
	want := filled(t, mine, 3)
	filled(t, other, 5)
	put(t, mine, journalName, append(slurp(t, other, journalName), "torn"...))
	s, r := open(t, Options{Dir: mine})
	if got := all(t, s); len(got) != len(want) || len(r.Aside) != 1 || len(r.Warnings) != 1 {
		t.Errorf("%d events, %+v", len(got), r)
	}
}

func TestNewerJournalIsLeftAlone(t *testing.T) {
	dir := t.TempDir()
	filled(t, dir, 3)
	text := bytes.Replace(slurp(t, dir, journalName), []byte("journal 1\n"), []byte("journal 2\n"), 1)
	put(t, dir, journalName, text)
	_, _, err := Open(t.Context(), Options{Dir: dir})
	if err == nil || !strings.Contains(err.Error(), ErrNewer.Error()) {
		t.Fatalf("err = %v", err)
	}
	if !bytes.Equal(slurp(t, dir, journalName), text) {
		t.Error("it was written to")
	}
}

// A power cut leaves half a frame. It stays where it is; what is written
// after it is found behind it, start after start.
func TestTornEndsStayWhereTheyAre(t *testing.T) {
	dir := t.TempDir()
	filled(t, dir, 3)
	for i := range 3 {
		text := slurp(t, dir, journalName)
		f, err := eventsFrame(frameEvents, 99, []incident.Event{newChain('z').next(t, "never acknowledged")})
		if err != nil {
			t.Fatal(err)
		}
		half := appendFrame(nil, f)
		put(t, dir, journalName, append(text, half[:len(half)-7]...))
		s, r := open(t, Options{Dir: dir})
		if len(r.Warnings) != 0 || r.Mode != Normal {
			t.Fatalf("start %d: %+v", i, r)
		}
		e := newChain(byte('b'+i)).next(t, "after the cut")
		keep(t, s, e)
		closeStore(t, s)
		drop(t, dir, dbName) // all has to come from the journal
		s, r = open(t, Options{Dir: dir})
		if got := all(t, s); r.Mode != Rebuilt || len(got) != 4+i || got[3+i].ID != e.ID {
			t.Fatalf("start %d: %+v, %d events", i, r, len(got))
		}
		closeStore(t, s)
		if !bytes.Contains(slurp(t, dir, journalName), half[:len(half)-7]) {
			t.Error("the torn end is gone")
		}
	}
}

// A power cut in the midst of the first start: the next one is a first start.
func TestFirstStartCutShort(t *testing.T) {
	for _, left := range [][]string{{dbName + ".new"}, {journalName + ".new"}, {journalName}, {dbName}} {
		dir := t.TempDir()
		s, _ := open(t, Options{Dir: dir})
		closeStore(t, s)
		whole := map[string][]byte{dbName: slurp(t, dir, dbName), journalName: slurp(t, dir, journalName)}
		drop(t, dir, dbName)
		drop(t, dir, journalName)
		for _, name := range left {
			data := whole[strings.TrimSuffix(name, ".new")]
			if strings.HasSuffix(name, ".new") {
				data = data[:len(data)/2]
			}
			put(t, dir, name, data)
		}
		s, r := open(t, Options{Dir: dir})
		if len(r.Warnings) != 0 || !slices.Contains([]Mode{Fresh, CaughtUp, Normal}, r.Mode) {
			t.Errorf("%v is left: %+v", left, r)
		}
		closeStore(t, s)
	}
}

// Where the program cannot be started again as a checker, damage is found all
// the same and does not end the process.
func TestWithoutAChecker(t *testing.T) {
	hooked.Store(false)
	defer hooked.Store(true)
	origin := t.TempDir()
	want := filled(t, origin, 25)
	db, journal := slurp(t, origin, dbName), slurp(t, origin, journalName)
	page := os.Getpagesize()
	for at := 0; at+page <= len(db); at += page {
		for _, how := range []string{"zeros", "cut short"} {
			dir := quickDir(t)
			broken := bytes.Clone(db)
			if how == "zeros" {
				clear(broken[at : at+page])
			} else {
				broken = broken[:at]
			}
			put(t, dir, dbName, broken)
			put(t, dir, journalName, journal)
			s, r := open(t, Options{Dir: dir})
			if got := all(t, s); len(got) != len(want) {
				t.Errorf("%s at %d: %d of %d events, %+v", how, at, len(got), len(want), r)
			}
			closeStore(t, s)
		}
	}
}

// A season of entries opens well within the five seconds.
func TestOpeningIsQuick(t *testing.T) {
	dir := quickDir(t)
	s, _ := open(t, Options{Dir: dir})
	c := newChain('a')
	for range 100 {
		var batch []incident.Event
		for range 100 {
			batch = append(batch, c.next(t, fmt.Sprint("a note of usual length ", c.last.DeviceSeq)))
		}
		keep(t, s, batch...)
	}
	closeStore(t, s)
	for _, lose := range []string{"", dbName, journalName} {
		drop(t, dir, lose)
		begin := time.Now()
		s, r := open(t, Options{Dir: dir})
		took := time.Since(begin)
		t.Logf("10,000 events, without %q: %s in %s", lose, r.Mode, took)
		// One to two seconds; the race detector and a busy machine take several
		// times that, so what is refused here is an opening that hangs.
		if took > 30*time.Second || len(all(t, s)) != 10_000 {
			t.Errorf("without %q: %d events in %s", lose, len(all(t, s)), took)
		}
		closeStore(t, s)
	}
}
