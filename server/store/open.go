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
)

// Options say where the store is. Dir is required.
type Options struct {
	Dir        string
	JournalDir string // on a second medium; Dir when ""
	Log        *slog.Logger
	Now        func() time.Time

	// FS is the layer below the journals; the system's own when nil.
	FS FS
	// MaxSize bounds wakeback.db, in bytes; 0 is no bound. Beyond it the disk
	// counts as full.
	MaxSize int
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
	if opt.FS == nil {
		opt.FS = osFS{}
	}
	return opt
}

// Mode says how a store was opened.
type Mode string

// The modes.
const (
	Fresh    Mode = "fresh"     // there was none
	Normal   Mode = "normal"    // both logs agree
	CaughtUp Mode = "caught_up" // one log was behind the other, as after a crash
	Rebuilt  Mode = "rebuilt"   // the file was missing or damaged; made again from the journal
	// Emptied: something is lost, or the two logs went apart. What could be read
	// was kept; numbers begin anew, under another epoch.
	Emptied Mode = "emptied"
	// ReadOnly: the disk is full or cannot be written to. All is read, nothing
	// is kept; see [Health].
	ReadOnly Mode = "read_only"
)

// Report is what opening found.
type Report struct {
	Mode     Mode
	Events   int
	Warnings []string // for the crew, in full sentences; none in normal modes
	Aside    []string // files that were set aside
}

const (
	dbName            = "wakeback.db"
	journalName       = "wakeback.journal"
	tracksName        = "tracks.db"
	tracksJournalName = "tracks.journal"
	// failedName marks a store whose files a flush has failed on: what the page
	// cache shows of them may not be on the disk, so they are copied, not used.
	failedName = "wakeback.failed"
)

// Open opens the store of a folder, making it when there is none. A damaged
// file is set aside and never overwritten; the report says so. A store that
// can be read and not written to opens too, as [ReadOnly]. Errors:
// [ErrLocked], [ErrNewer]; [ErrReadOnly] and [ErrDiskFull] when there is no
// store that could be read.
func Open(ctx context.Context, opt Options) (*Store, Report, error) {
	opt = opt.withDefaults()
	o := &opening{
		opt: opt, db: filepath.Join(opt.Dir, dbName), journal: filepath.Join(opt.JournalDir, journalName),
	}
	s, err := o.open(ctx)
	if err != nil {
		return nil, o.report, fmt.Errorf("open the store in %s: %w", opt.Dir, classify(errors.Join(err, o.release())))
	}
	return s, o.report, nil
}

// opening is the work of Open.
type opening struct {
	opt         Options
	db, journal string // paths
	report      Report
	locks       []*lock
}

func (o *opening) warn(format string, args ...any) {
	w := fmt.Sprintf(format, args...)
	o.report.Warnings = append(o.report.Warnings, w)
	o.opt.Log.Warn(w)
}

// aside sets a file aside, if it is there.
func (o *opening) aside(path, why string) error {
	if !exists(path) {
		return nil
	}
	to, err := setAside(o.opt.FS, path, why, o.opt.Now())
	if err == nil {
		o.report.Aside = append(o.report.Aside, to)
	}
	return err
}

func (o *opening) open(ctx context.Context) (*Store, error) {
	if err := errors.Join(os.MkdirAll(o.opt.Dir, 0o700), os.MkdirAll(o.opt.JournalDir, 0o700)); err != nil {
		return nil, err
	}
	if err := o.lock(); err != nil {
		return nil, err
	}
	t := newTracks(o.opt)
	checked := make(chan verdict, 1)
	go func() {
		v, _ := check(ctx, t.path, true)
		checked <- v
	}()
	c, err := o.collect(ctx)
	ofTracks := <-checked // always, so that no checker outlives Open
	if err != nil {
		return nil, err
	}
	s, err := o.settle(c)
	if err != nil {
		return nil, err
	}
	s.tracks = t
	t.open(ofTracks, s.db, o)
	o.report.Events = len(s.events)
	return s, nil
}

// lock takes the folders for this process.
func (o *opening) lock() error {
	for _, dir := range []string{o.opt.Dir, o.opt.JournalDir} {
		if len(o.locks) == 1 && sameDir(dir, o.opt.Dir) {
			continue
		}
		l, err := takeLock(dir)
		if err != nil {
			return err
		}
		o.locks = append(o.locks, l)
	}
	return nil
}

func sameDir(a, b string) bool {
	x, errX := os.Stat(a)
	y, errY := os.Stat(b)
	return errX == nil && errY == nil && os.SameFile(x, y)
}

func (o *opening) release() error { return releaseAll(o.locks) }

func releaseAll(locks []*lock) error {
	var err error
	for _, l := range locks {
		err = errors.Join(err, l.release())
	}
	return err
}

// settle brings the disk to what was collected, and opens it for writing. A
// disk that is full or cannot be written to still gives a store to read from.
func (o *opening) settle(c collected) (*Store, error) {
	s := &Store{opt: o.opt, epoch: c.im.epoch, log: o.opt.Log, locks: o.locks}
	s.load(c.im)
	db, j, err := o.write(c)
	if err == nil {
		s.db, s.journal = db, journal{f: j}
		o.report.Mode = c.mode
		return s, nil
	}
	err = classify(err)
	if c.mode == Fresh || !errors.Is(err, ErrDiskFull) && !errors.Is(err, ErrReadOnly) {
		return nil, err
	}
	s.fail(err)
	o.report.Mode = ReadOnly
	o.warn("%s", words(err))
	return s, nil
}

// write makes or mends both files and opens them.
func (o *opening) write(c collected) (*bbolt.DB, File, error) {
	if err := o.settleFiles(c); err != nil {
		return nil, nil, errors.Join(err, o.unstage())
	}
	db, err := bbolt.Open(o.db, 0o600, boltOptions(false, o.opt.MaxSize))
	if err != nil {
		return nil, nil, err
	}
	err = migrate(db, migrations)
	if err == nil && c.addToFile {
		err = db.Update(func(tx *bbolt.Tx) error { return putImage(tx, c.im, c.fileEvents) })
	}
	if err != nil {
		return nil, nil, errors.Join(err, db.Close())
	}
	f, err := o.opt.FS.Append(o.journal)
	if err != nil {
		return nil, nil, errors.Join(err, db.Close())
	}
	return db, f, nil
}

// settleFiles makes the files that are made anew, both of them whole before
// either is put in its place, and adds to the journal what it lacks.
func (o *opening) settleFiles(c collected) error {
	text, err := c.journalText()
	if err != nil {
		return err
	}
	if c.remakeFile {
		if err := o.stageFile(c.im); err != nil {
			return err
		}
	}
	if c.remakeJournal {
		if err := stage(o.opt.FS, o.journal, append(header(c.im.epoch), text...)); err != nil {
			return err
		}
	}
	if c.remakeFile {
		if err := o.install(o.db, c.why); err != nil {
			return err
		}
	}
	switch {
	case c.remakeJournal:
		err = o.install(o.journal, c.whyJournal)
	case c.addToJournal:
		err = o.appendJournal(text)
	}
	if err != nil {
		return err
	}
	return removeIf(o.opt.FS, filepath.Join(o.opt.Dir, failedName))
}

// install puts a staged file in its place and sets aside what stands there.
func (o *opening) install(path, why string) error {
	if err := o.aside(path, why); err != nil {
		return err
	}
	return move(o.opt.FS, path+staged, path)
}

// unstage takes away what was staged: a disk that is full must not be filled
// with it further.
func (o *opening) unstage() error {
	return errors.Join(removeIf(o.opt.FS, o.db+staged), removeIf(o.opt.FS, o.journal+staged))
}

// journalText is what the journal lacks, as frames.
func (c *collected) journalText() (text []byte, err error) {
	rest, err := framesOf(c.im, c.journalEvents)
	for _, f := range rest {
		text = appendFrame(text, f)
	}
	return text, err
}

func (o *opening) appendJournal(text []byte) error {
	f, err := o.opt.FS.Append(o.journal)
	if err != nil {
		return err
	}
	n, err := f.Write(text)
	switch {
	case err == nil && n < len(text):
		err = io.ErrShortWrite
	case err == nil:
		err = f.Sync()
	}
	return errors.Join(err, f.Close())
}

func newEpoch() string {
	var b [epochLen / 2]byte
	_, _ = rand.Read(b[:]) // never fails, see crypto/rand
	return hex.EncodeToString(b[:])
}
