package store

import (
	"encoding/json"
	"errors"
	"fmt"
	"os"
	"path/filepath"
	"slices"
	"strings"
	"testing"
	"time"

	"github.com/google/go-cmp/cmp"

	"wakeback/drift/nav"
	"wakeback/search/incident"
)

func TestMain(m *testing.M) {
	CheckMain()
	writerMain()
	os.Exit(m.Run())
}

var t0 = time.Date(2026, 6, 1, 2, 14, 7, 0, time.UTC)

// chain makes events of one device, one after the other.
type chain struct {
	device incident.DeviceID
	last   incident.Event
}

func newChain(letter byte) *chain {
	return &chain{device: incident.DeviceID(fmt.Sprintf("de000000-0000-4000-8000-%012x", letter))}
}

func (c *chain) next(t testing.TB, text string) incident.Event {
	t.Helper()
	n := c.last.DeviceSeq + 1
	at := t0.Add(time.Duration(n) * time.Second)
	tail := string(c.device)[24:]
	e, err := incident.New(incident.Event{
		ID:       incident.EventID(fmt.Sprintf("018f3c2e-%04x-7000-8000-%s", n%65536, tail)),
		Incident: "018f3c2e-7b1a-7c3d-9e4f-000000000001", Device: c.device, DeviceSeq: n, PrevHash: c.last.Hash,
		At: at, DeviceAt: at,
	}, incident.KindNote, incident.Note{Text: text})
	if err != nil {
		t.Fatal(err)
	}
	c.last = e
	return e
}

func open(t testing.TB, opt Options) (*Store, Report) {
	t.Helper()
	s, r, err := Open(t.Context(), opt)
	if err != nil {
		t.Fatalf("open: %v (report %+v)", err, r)
	}
	t.Cleanup(func() { _ = s.Close() })
	return s, r
}

func closeStore(t testing.TB, s *Store) {
	t.Helper()
	if err := s.Close(); err != nil {
		t.Fatal(err)
	}
}

func keep(t testing.TB, s *Store, events ...incident.Event) []incident.Event {
	t.Helper()
	out, err := s.Append(events)
	if err != nil {
		t.Fatalf("append: %v", err)
	}
	return out
}

func all(t testing.TB, s *Store) []incident.Event {
	t.Helper()
	events, err := s.EventsAfter(0, 1<<20)
	if err != nil {
		t.Fatal(err)
	}
	return events
}

func TestKeepsAndFindsAgain(t *testing.T) {
	dir, journals := t.TempDir(), t.TempDir()
	opt := Options{Dir: dir, JournalDir: journals, Now: func() time.Time { return t0 }}
	s, r := open(t, opt)
	if r.Mode != Fresh || len(r.Warnings) != 0 {
		t.Fatalf("report = %+v", r)
	}
	a, b := newChain('a'), newChain('b')
	first := keep(t, s, a.next(t, "one"), b.next(t, "two"))
	if first[0].Seq != 1 || first[1].Seq != 2 || !first[0].ReceivedAt.Equal(t0) {
		t.Fatalf("numbers %d, %d, received %v", first[0].Seq, first[1].Seq, first[0].ReceivedAt)
	}
	again := keep(t, s, first[0], a.next(t, "three"), first[1])
	if again[0].Seq != 1 || again[1].Seq != 3 || again[2].Seq != 2 {
		t.Fatalf("numbers of a batch with repeats: %d %d %d", again[0].Seq, again[1].Seq, again[2].Seq)
	}
	if err := s.PutDoc("vessel", "profile", []byte(`{"name":"Puffin"}`)); err != nil {
		t.Fatal(err)
	}
	before, epoch := all(t, s), s.Epoch()
	closeStore(t, s)

	s, r = open(t, opt)
	if r.Mode != Normal || r.Events != 3 || len(r.Warnings) != 0 {
		t.Errorf("report = %+v", r)
	}
	if diff := cmp.Diff(before, all(t, s)); diff != "" || s.Epoch() != epoch {
		t.Errorf("after opening again (-before +after):\n%s", diff)
	}
	if n, hash, _ := s.ChainEnd(a.device); n != 2 || hash != a.last.Hash {
		t.Errorf("end of the chain: %d %s", n, hash)
	}
	docs, _ := s.Docs("vessel")
	if string(docs["profile"]) != `{"name":"Puffin"}` {
		t.Errorf("docs = %q", docs)
	}
	if got, _ := s.EventsAfter(1, 1); len(got) != 1 || got[0].Seq != 2 {
		t.Errorf("one event after number 1: %+v", got)
	}
}

func TestSameIDOtherContent(t *testing.T) {
	s, _ := open(t, Options{Dir: t.TempDir()})
	e := newChain('a').next(t, "as it was")
	keep(t, s, e)
	other := newChain('a').next(t, "as it was not")
	_, err := s.Append([]incident.Event{newChain('b').next(t, "in the same batch"), other})
	var conflict *ConflictError
	if !errors.As(err, &conflict) || conflict.ID != e.ID {
		t.Fatalf("err = %v", err)
	}
	if got := all(t, s); len(got) != 1 || got[0].Hash != e.Hash {
		t.Errorf("the stored event was touched, or half of the batch was kept: %+v", got)
	}
}

func TestRefusesAWrongHash(t *testing.T) {
	s, _ := open(t, Options{Dir: t.TempDir()})
	e := newChain('a').next(t, "x")
	e.Body = json.RawMessage(`{"text":"y"}`)
	if _, err := s.Append([]incident.Event{e}); !errors.Is(err, incident.ErrHash) || !strings.Contains(err.Error(), string(e.ID)) {
		t.Errorf("err = %v", err)
	}
	if !s.Health().Durable {
		t.Error("a bad event stopped the store")
	}
}

// A second server on the folder is told so within a second or two.
func TestTwoServersOnOneFolder(t *testing.T) {
	dir := t.TempDir()
	s, _ := open(t, Options{Dir: dir})
	e := newChain('a').next(t, "x")
	keep(t, s, e)
	_, _, err := Open(t.Context(), Options{Dir: dir})
	if !errors.Is(err, ErrLocked) || !strings.Contains(err.Error(), dir) {
		t.Fatalf("err = %v", err)
	}
	if entries, _ := filepath.Glob(filepath.Join(dir, "*.bad*")); len(entries) != 0 {
		t.Errorf("the second server set aside %v", entries)
	}
	if len(all(t, s)) != 1 {
		t.Error("the first server lost its event")
	}
}

func TestNewerStoreIsLeftAlone(t *testing.T) {
	dir := t.TempDir()
	s, _ := open(t, Options{Dir: dir})
	closeStore(t, s)
	setSchema(t, filepath.Join(dir, dbName), "99")
	if _, _, err := Open(t.Context(), Options{Dir: dir}); !errors.Is(err, ErrNewer) {
		t.Fatalf("err = %v", err)
	}
	setSchema(t, filepath.Join(dir, dbName), "1")
	if _, r := open(t, Options{Dir: dir}); r.Mode != Normal {
		t.Errorf("report = %+v", r)
	}
}

func TestUnwritableFolder(t *testing.T) {
	if os.Getuid() == 0 {
		dir := t.TempDir()
		file := filepath.Join(dir, "a file")
		if err := os.WriteFile(file, nil, 0o600); err != nil {
			t.Fatal(err)
		}
		if _, _, err := Open(t.Context(), Options{Dir: filepath.Join(file, "data")}); err == nil || !strings.Contains(err.Error(), file) {
			t.Errorf("a folder below a file: %v", err)
		}
		return // root may write anywhere
	}
	dir := t.TempDir()
	if err := os.Chmod(dir, 0o500); err != nil {
		t.Fatal(err)
	}
	if _, _, err := Open(t.Context(), Options{Dir: dir}); !errors.Is(err, ErrReadOnly) {
		t.Errorf("err = %v", err)
	}
}

// The disk fills up: what was acknowledged stays, what was not is refused,
// reading goes on, and after room was made a new start goes on writing.
func TestDiskFull(t *testing.T) {
	dir := t.TempDir()
	s, _ := open(t, Options{Dir: dir, MaxSize: 512 << 10})
	c := newChain('a')
	kept := 0
	var err error
	for range 20000 {
		if _, err = s.Append([]incident.Event{c.next(t, strings.Repeat("x", 500))}); err != nil {
			break
		}
		kept++
	}
	if !errors.Is(err, ErrNotDurable) || !errors.Is(err, ErrDiskFull) || kept == 0 {
		t.Fatalf("after %d events: %v", kept, err)
	}
	h := s.Health()
	if h.Durable || !strings.Contains(h.Problem, "full") || len(all(t, s)) != kept {
		t.Errorf("health %+v, %d events", h, len(all(t, s)))
	}
	if _, again := s.Append([]incident.Event{newChain('b').next(t, "x")}); !errors.Is(again, ErrNotDurable) {
		t.Errorf("after the failure: %v", again)
	}
	closeStore(t, s)
	s, _ = open(t, Options{Dir: dir})
	if got := len(all(t, s)); got < kept {
		t.Errorf("%d of %d acknowledged events are left", got, kept)
	}
	keep(t, s, newChain('b').next(t, "room again"))
}

func TestTrackIsKeptCompactly(t *testing.T) {
	dir := t.TempDir()
	s, _ := open(t, Options{Dir: dir})
	device := incident.DeviceID("de000000-0000-4000-8000-000000000001")
	p := nav.PositionFromDegrees(54.1, 7.9)
	var want []nav.Fix
	bytes := 0
	for minute := range 60 {
		var batch []nav.Fix
		for second := range 60 {
			p = p.Shift(nav.Along(nav.True(float64(minute)*5), 3.1+0.01*float64(second%7)))
			batch = append(batch, nav.Fix{
				At: t0.Add(time.Duration(minute*60+second) * time.Second), Position: p,
				SogKn: nav.Some(6.03), CogTrue: nav.Some(nav.True(float64(minute) * 5)),
			})
		}
		want = append(want, batch...)
		bytes += len(encodeFixes(batch))
		if err := s.AppendTrack(device, batch); err != nil {
			t.Fatal(err)
		}
	}
	t.Logf("an hour at 1 Hz takes %d bytes", bytes)
	if bytes > 50_000 {
		t.Errorf("an hour at 1 Hz takes %d bytes, more than the 50 kB stated", bytes)
	}
	closeStore(t, s)
	s, _ = open(t, Options{Dir: dir})
	got, err := s.Track(device, t0.Add(10*time.Minute), t0.Add(20*time.Minute))
	if err != nil || len(got) != 601 {
		t.Fatalf("%d fixes, %v", len(got), err)
	}
	for i, f := range got {
		w := want[600+i]
		if !f.At.Equal(w.At) || nav.Inverse(f.Position, w.Position).RangeM > 0.01 || f.ErrorM.IsSet() || f.SogKn.Or(0) != 6.03 {
			t.Fatalf("fix %d = %+v, want %+v", i, f, w)
		}
	}
	if none, err := s.Track("de000000-0000-4000-8000-000000000002", t0, t0.Add(time.Hour)); err != nil || len(none) != 0 {
		t.Errorf("another device's track: %d fixes, %v", len(none), err)
	}
	if devices, _ := s.TrackDevices(); !slices.Equal(devices, []incident.DeviceID{device}) {
		t.Errorf("devices = %v", devices)
	}
}

func TestDocs(t *testing.T) {
	dir := t.TempDir()
	s, _ := open(t, Options{Dir: dir})
	for _, bad := range []struct{ kind, name, doc string }{
		{"", "a", "{}"}, {"device", "", "{}"}, {"dev\x00ice", "a", "{}"}, {"device", "a", "{"}, {"device", "a", "null"},
	} {
		if err := s.PutDoc(bad.kind, bad.name, []byte(bad.doc)); !errors.Is(err, ErrDoc) {
			t.Errorf("%+v: %v", bad, err)
		}
	}
	for _, name := range []string{"a", "b", "c"} {
		if err := s.PutDoc("device", name, []byte(`{"n":"`+name+`"}`)); err != nil {
			t.Fatal(err)
		}
	}
	if err := s.DeleteDoc("device", "b"); err != nil {
		t.Fatal(err)
	}
	closeStore(t, s)
	// Also when the file is gone and all comes from the journal.
	for _, gone := range []bool{false, true} {
		if gone {
			if err := os.Remove(filepath.Join(dir, dbName)); err != nil {
				t.Fatal(err)
			}
		}
		s, _ = open(t, Options{Dir: dir})
		docs, _ := s.Docs("device")
		if len(docs) != 2 || string(docs["c"]) != `{"n":"c"}` {
			t.Errorf("file gone %t: docs = %q", gone, docs)
		}
		closeStore(t, s)
	}
}

func TestBackup(t *testing.T) {
	s, _ := open(t, Options{Dir: t.TempDir()})
	c := newChain('a')
	keep(t, s, c.next(t, "one"))
	to := t.TempDir()
	if err := s.Backup(filepath.Join(to, dbName)); err != nil {
		t.Fatal(err)
	}
	keep(t, s, c.next(t, "two"))
	copied, r := open(t, Options{Dir: to})
	if got := all(t, copied); len(got) != 1 || r.Events != 1 {
		t.Errorf("%d events in the copy", len(got))
	}
	if copied.Epoch() == s.Epoch() {
		t.Error("the copy has the epoch of the original: phones would take its numbers for those they know")
	}
	if err := s.Backup("/nowhere/at/all"); err == nil {
		t.Error("a backup to nowhere succeeds")
	}
}
