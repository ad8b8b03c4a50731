package store

import (
	"context"
	"crypto/rand"
	"encoding/hex"
	"errors"
	"fmt"
	"io"
	"log/slog"
	"os"
	"path/filepath"
	"time"

	"go.etcd.io/bbolt"

	"wakeback/search/incident"
)

// Options say where the store is. Dir is required.
type Options struct {
	Dir        string
	JournalDir string // on a second medium; Dir when ""
	Log        *slog.Logger
	Now        func() time.Time

	// OpenJournal opens the journal for appending; the system's file when nil.
	OpenJournal func(path string) (JournalFile, error)
	// MaxSize bounds the bbolt file, in bytes; 0 is no bound. Beyond it the
	// disk counts as full.
	MaxSize int
}

// Mode says how a store was opened.
type Mode string

// The modes.
const (
	Fresh    Mode = "fresh"     // there was none
	Normal   Mode = "normal"    // both logs agree
	CaughtUp Mode = "caught_up" // one log was behind the other, as after a crash
	Rebuilt  Mode = "rebuilt"   // the file was missing or damaged; made again from the journal
	Emptied  Mode = "emptied"   // both logs were damaged: what could be read was kept, numbers begin anew
)

// Report is what opening found.
type Report struct {
	Mode     Mode
	Events   int
	Warnings []string // for the crew, in full sentences; none in normal modes
	Aside    []string // files that were set aside
}

const (
	dbName      = "wakeback.db"
	journalName = "wakeback.journal"
)

// Open opens the store of a folder, making it when there is none. A damaged
// file is set aside and never overwritten; the report says so. Errors:
// [ErrLocked], [ErrReadOnly], [ErrDiskFull], [ErrNewer].
func Open(ctx context.Context, opt Options) (*Store, Report, error) {
	opt = opt.withDefaults()
	o := &opening{opt: opt, db: filepath.Join(opt.Dir, dbName), journal: filepath.Join(opt.JournalDir, journalName)}
	s, err := o.open(ctx)
	if err != nil {
		return nil, o.report, fmt.Errorf("open the store in %s: %w", opt.Dir, classify(err))
	}
	return s, o.report, nil
}

func (opt Options) withDefaults() Options {
	if opt.JournalDir == "" {
		opt.JournalDir = opt.Dir
	}
	if opt.Log == nil {
		opt.Log = slog.New(slog.DiscardHandler)
	}
	if opt.Now == nil {
		opt.Now = time.Now
	}
	if opt.OpenJournal == nil {
		opt.OpenJournal = func(path string) (JournalFile, error) {
			return os.OpenFile(path, os.O_CREATE|os.O_APPEND|os.O_WRONLY, 0o600)
		}
	}
	return opt
}

// opening is the work of Open.
type opening struct {
	opt         Options
	db, journal string // paths
	report      Report
}

func (o *opening) warn(format string, args ...any) {
	w := fmt.Sprintf(format, args...)
	o.report.Warnings = append(o.report.Warnings, w)
	o.opt.Log.Warn(w)
}

func (o *opening) open(ctx context.Context) (*Store, error) {
	if err := errors.Join(os.MkdirAll(o.opt.Dir, 0o700), os.MkdirAll(o.opt.JournalDir, 0o700)); err != nil {
		return nil, err
	}
	file, err := o.checkFile(ctx)
	if err != nil {
		return nil, err
	}
	written, text, err := o.readJournal()
	if err != nil {
		return nil, err
	}
	return o.reconcile(file, written, text)
}

// checkFile walks the bbolt file before it is opened here. A damaged one is
// set aside; then, and when there is none, the verdict is nil.
func (o *opening) checkFile(ctx context.Context) (*verdict, error) {
	if _, err := os.Stat(o.db); errors.Is(err, os.ErrNotExist) {
		return nil, nil
	} else if err != nil {
		return nil, err
	}
	v := check(ctx, o.db)
	switch {
	case v.Locked:
		return nil, ErrLocked
	case v.Newer:
		return nil, fmt.Errorf("%w: %s", ErrNewer, v.Problem)
	case v.Problem == "":
		return &v, nil
	case ctx.Err() != nil:
		return nil, ctx.Err()
	}
	aside, err := setAside(o.db, "bad", o.opt.Now())
	if err != nil {
		return nil, err
	}
	o.report.Aside = append(o.report.Aside, aside)
	o.warn("The stored file was damaged and is set aside as %s (%s).", filepath.Base(aside), v.Problem)
	return nil, nil
}

// written is what the journal holds; nil when there is none that can be read.
// Its torn end is cut off and kept.
func (o *opening) readJournal() (*image, []byte, error) {
	text, err := readWhole(o.journal)
	if errors.Is(err, os.ErrNotExist) {
		return nil, nil, nil
	}
	if err != nil {
		return nil, nil, err
	}
	s, err := parseJournal(text)
	if err == nil {
		var im image
		if im, err = imageOf(s); err == nil {
			return &im, text, o.cut(text, s)
		}
		if s.epoch != "" && len(im.events) > 0 && im.verify() == nil {
			// What stands before the damage is good.
			if err := o.asideJournal(err); err != nil {
				return nil, nil, err
			}
			im.epoch = ""
			return &im, nil, nil
		}
	}
	return nil, nil, o.asideJournal(err)
}

func (o *opening) cut(text []byte, s scan) error {
	if s.torn == 0 {
		return nil
	}
	kept, err := cutTail(o.journal, text, s.good, o.opt.Now())
	if err != nil {
		return err
	}
	o.report.Aside = append(o.report.Aside, kept)
	o.opt.Log.Warn("the journal's last entry was not finished, as after a power cut; it is kept", "file", kept, "bytes", s.torn)
	return nil
}

func (o *opening) asideJournal(why error) error {
	aside, err := setAside(o.journal, "bad", o.opt.Now())
	if err != nil {
		return err
	}
	o.report.Aside = append(o.report.Aside, aside)
	o.warn("The journal was damaged and is set aside as %s (%v).", filepath.Base(aside), why)
	return nil
}

// maxJournal bounds what is read into memory; a season at 1 Hz with ten
// phones stays below. Our choice.
const maxJournal = 2 << 30

func readWhole(path string) ([]byte, error) {
	f, err := os.Open(path)
	if err != nil {
		return nil, err
	}
	defer f.Close()
	info, err := f.Stat()
	if err != nil {
		return nil, err
	}
	if info.Size() > maxJournal {
		return nil, fmt.Errorf("the journal %s is larger than %d bytes", path, maxJournal)
	}
	return io.ReadAll(f)
}

// reconcile opens the file with what both logs hold.
func (o *opening) reconcile(file *verdict, written *image, text []byte) (*Store, error) {
	if file != nil && written != nil && text != nil && written.epoch != file.Epoch {
		if err := o.asideJournal(errors.New("it belongs to another store")); err != nil {
			return nil, err
		}
		written, text = nil, nil
	}
	db, err := bbolt.Open(o.db, 0o600, boltOptions(false, o.opt.MaxSize))
	if err != nil {
		return nil, err
	}
	s, err := o.fill(db, file, written, text)
	if errors.Is(err, errDiverged) {
		if err := o.asideJournal(err); err != nil {
			return nil, errors.Join(err, db.Close())
		}
		s, err = o.fill(db, file, nil, nil)
	}
	if err != nil {
		return nil, errors.Join(err, db.Close())
	}
	return s, nil
}

func (o *opening) fill(db *bbolt.DB, file *verdict, written *image, text []byte) (*Store, error) {
	im, err := o.image(db, file, written)
	if err != nil {
		return nil, err
	}
	if err := syncDir(o.opt.Dir); err != nil {
		return nil, err
	}
	if text == nil {
		err = o.newJournal(im)
	}
	if err != nil {
		return nil, err
	}
	f, err := o.opt.OpenJournal(o.journal)
	if err != nil {
		return nil, err
	}
	s := &Store{opt: o.opt, epoch: im.epoch, log: o.opt.Log, db: db, journal: journal{f: f}}
	s.load(im)
	if text != nil {
		if err := s.evenOut(written, im); err != nil {
			return nil, errors.Join(err, f.Close())
		}
	}
	o.report.Events = len(im.events)
	return s, nil
}

// image is what the store holds from now on: of two logs the one that has
// more, written into the file.
func (o *opening) image(db *bbolt.DB, file *verdict, written *image) (image, error) {
	if file != nil {
		if err := migrate(db); err != nil {
			return image{}, err
		}
		im, err := readImage(db)
		if err != nil {
			return image{}, err
		}
		return o.catchUp(db, im, written)
	}
	im := image{docs: make(map[docKey][]byte)}
	switch {
	case written == nil && len(o.report.Aside) == 0:
		o.report.Mode = Fresh
	case written == nil:
		o.report.Mode = Emptied
		o.warn("Nothing could be read. What the phones hold comes back when they connect; keep the files set aside.")
	case written.epoch == "":
		im, o.report.Mode = *written, Emptied
		o.warn("%d entries were read up to the damage and kept. The rest comes back from the phones when they connect; keep the files set aside.", len(im.events))
	default:
		im, o.report.Mode = *written, Rebuilt
		o.warn("The store was made again from its journal: %d entries, none of those that were acknowledged is missing.", len(im.events))
	}
	if im.epoch == "" {
		im.epoch = newEpoch()
	}
	return im, create(db, im)
}

// catchUp brings the file to where the journal is, if that is ahead: as after
// a crash between the two, or when the file's newest commit was lost.
func (o *opening) catchUp(db *bbolt.DB, im image, written *image) (image, error) {
	o.report.Mode = Normal
	if written == nil {
		if len(o.report.Aside) == 0 {
			o.warn("The journal was missing; it is written anew from the store.")
		}
		o.report.Mode = CaughtUp
		return im, nil
	}
	n := min(len(im.events), len(written.events))
	for i := range n {
		if im.events[i].Hash != written.events[i].Hash {
			return im, fmt.Errorf("%w at entry %d", errDiverged, i+1)
		}
	}
	if written.head == im.head && len(written.events) == len(im.events) {
		return im, nil
	}
	o.report.Mode = CaughtUp
	if written.head <= im.head {
		return im, nil // the journal is behind: see evenOut
	}
	missing := written.events[n:]
	o.opt.Log.Warn("the file was behind its journal and is brought up", "entries", len(missing))
	im.events, im.docs, im.head = append(im.events, missing...), written.docs, written.head
	return im, db.Update(func(tx *bbolt.Tx) error {
		return errors.Join(putEvents(tx, missing), putDocs(tx, im.docs), putHead(tx, im.head))
	})
}

// errDiverged: file and journal were both written to, apart from one another,
// as when a copy of one was put back.
var errDiverged = errors.New("the journal and the store hold different entries")

// newJournal writes the journal of an image.
func (o *opening) newJournal(im image) error {
	text := header(im.epoch)
	for from := 0; from < len(im.events); from += 100 {
		f, err := eventsFrame(im.head, im.events[from:min(from+100, len(im.events))])
		if err != nil {
			return err
		}
		text = appendFrame(text, f)
	}
	for k, doc := range im.docs {
		f, err := docFrame(im.head, docChange{k.kind, k.name, doc})
		if err != nil {
			return err
		}
		text = appendFrame(text, f)
	}
	return writeFile(o.journal, text)
}

// load takes an image into memory.
func (s *Store) load(im image) {
	s.byID = make(map[incident.EventID]int, len(im.events))
	s.chains = make(map[incident.DeviceID]link)
	s.docs, s.head = im.docs, im.head
	s.remember(im.events)
}

// evenOut writes into the journal what only the file has.
func (s *Store) evenOut(written *image, im image) error {
	if written.head >= im.head && len(written.events) >= len(im.events) {
		return nil
	}
	for from := len(written.events); from < len(im.events); from += 100 {
		f, err := eventsFrame(im.head, im.events[from:min(from+100, len(im.events))])
		if err != nil {
			return err
		}
		if err := s.journal.write(f, true); err != nil {
			return err
		}
	}
	for k, doc := range im.docs {
		if string(written.docs[k]) == string(doc) {
			continue
		}
		f, err := docFrame(im.head, docChange{k.kind, k.name, doc})
		if err != nil {
			return err
		}
		if err := s.journal.write(f, true); err != nil {
			return err
		}
	}
	for k := range written.docs {
		if _, ok := im.docs[k]; ok {
			continue
		}
		f, err := docFrame(im.head, docChange{k.kind, k.name, nil})
		if err != nil {
			return err
		}
		if err := s.journal.write(f, true); err != nil {
			return err
		}
	}
	return nil
}

func newEpoch() string {
	var b [16]byte
	_, _ = rand.Read(b[:]) // never fails, see crypto/rand
	return hex.EncodeToString(b[:])
}
