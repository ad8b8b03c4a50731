package store

import (
	"context"
	"errors"
	"fmt"
	"os"
	"path/filepath"

	"wakeback/search/incident"
)

// collected is what both logs hold together, and what has to be written so
// that each of them holds it. Collecting writes nothing.
type collected struct {
	im   image
	mode Mode

	remakeFile bool   // the file is made anew, what stands there set aside
	why        string // part of the name of the file set aside
	addToFile  bool
	fileEvents int // events that the file has

	remakeJournal bool
	whyJournal    string
	addToJournal  bool
	journalEvents int // events that the journal has
}

// collect reads both logs and decides.
func (o *opening) collect(ctx context.Context) (collected, error) {
	file, carved, err := o.readFile(ctx)
	if err != nil {
		return collected{}, err
	}
	j, loose, err := o.readJournal()
	if err != nil {
		return collected{}, err
	}
	if file != nil && j != nil && j.epoch != file.epoch {
		o.warn("The journal belongs to another store and is set aside.")
		j, loose = nil, nil
	}
	c := collected{why: "bad", whyJournal: "bad"}
	o.base(&c, file, j)
	found := append(carved, loose...)
	if j != nil {
		found = append(found, j.all...)
	}
	o.merge(&c, found)
	o.plan(&c, file, j)
	if exists(filepath.Join(o.opt.Dir, failedName)) {
		o.opt.Log.Warn("a flush had failed; the store goes on with fresh files, the old ones are set aside")
		c.remakeFile, c.remakeJournal, c.fileEvents, c.journalEvents = true, true, 0, 0
		c.why, c.whyJournal = "failed", "failed"
	}
	return c, nil
}

// base starts with the file, or with the journal where there is no good file.
func (o *opening) base(c *collected, file *image, j *content) {
	switch {
	case file != nil:
		c.im, c.mode = *file, Normal
		if j != nil && j.head > file.head {
			c.im.docs, c.im.head = j.docs, j.head
			c.im.addConflicts(j.conflicts...)
		}
	case j != nil:
		c.im, c.mode = j.image, Rebuilt
		if j.hole {
			c.mode = Emptied
		}
	default:
		c.im, c.mode = image{docs: make(map[docKey][]byte)}, Fresh
		if exists(o.db) || exists(o.journal) {
			c.mode = Emptied
		}
	}
}

// merge adds what else was found.
func (o *opening) merge(c *collected, found []incident.Event) {
	added, renumbered := c.im.merge(found)
	if renumbered {
		c.mode = Emptied
	}
	if c.mode == Normal && added > 0 {
		c.mode = CaughtUp
		o.opt.Log.Warn("the file was behind its journal and is brought up", "entries", added)
	}
	if c.mode == Emptied || c.im.epoch == "" {
		c.im.epoch = newEpoch()
	}
	switch {
	case c.mode == Rebuilt && len(c.im.events)+len(c.im.docs) == 0:
		c.mode = Fresh // the first start was cut short
	case c.mode == Rebuilt:
		o.warn("The store was made again from its journal: %d entries, none of those that were acknowledged is missing.", len(c.im.events))
	case c.mode == Emptied:
		o.warn("Both copies of the store were damaged or had gone apart. %d entries could be read and are kept. What the phones hold comes back when they connect; if one is not let in, pair it again. Keep the files set aside.", len(c.im.events))
	}
}

// plan says what each of the two files lacks.
func (o *opening) plan(c *collected, file *image, j *content) {
	if file == nil {
		c.remakeFile = true
	} else {
		c.fileEvents = len(file.events)
		c.addToFile = len(c.im.events) > c.fileEvents || c.im.epoch != file.epoch || c.im.head != file.head
		if c.addToFile || j == nil && exists(o.journal) {
			c.mode = later(c.mode, CaughtUp)
		}
	}
	if j == nil || j.hole || c.im.epoch != j.epoch {
		c.remakeJournal = true
		if file != nil && j == nil && !exists(o.journal) && len(c.im.events) > 0 {
			c.mode = later(c.mode, CaughtUp)
			o.warn("The journal was missing; it is written anew from the store.")
		}
		if j != nil && j.hole {
			c.mode = later(c.mode, CaughtUp)
			o.warn("The journal was damaged and is set aside; it is written anew.")
		}
		return
	}
	c.journalEvents = len(j.events)
	c.addToJournal = len(c.im.events) > c.journalEvents || j.head != c.im.head || !sameDocs(j.docs, c.im.docs)
	if c.addToJournal {
		c.mode = later(c.mode, CaughtUp)
	}
}

// later: a normal opening becomes one of another mode.
func later(m, other Mode) Mode {
	if m == Normal {
		return other
	}
	return m
}

// readFile reads wakeback.db, after a process of its own has walked it. Of a
// damaged one it reads the events that stand in it anywhere.
func (o *opening) readFile(ctx context.Context) (*image, []incident.Event, error) {
	v, unforked := check(ctx, o.db, false)
	if unforked {
		o.opt.Log.Warn("the file was checked in this process: the program does not call store.CheckMain first thing")
	}
	switch v.State {
	case absent:
		return nil, nil, nil
	case locked:
		return nil, nil, ErrLocked
	case newer:
		return nil, nil, fmt.Errorf("%w: %s", ErrNewer, v.Problem)
	case denied:
		return nil, nil, fmt.Errorf("%w: %s", ErrReadOnly, v.Problem)
	case good:
		im, err := readFile(o.db)
		if err == nil {
			return &im, nil, nil
		}
		v.Problem = err.Error()
	}
	if err := ctx.Err(); err != nil {
		return nil, nil, err
	}
	o.warn("The stored file was damaged and is set aside (%s).", v.Problem)
	text, err := os.ReadFile(o.db)
	if err != nil {
		o.opt.Log.Warn("look for entries in the damaged file", "error", err)
	}
	return nil, carve(text), nil
}

// readJournal reads the journal; nil when there is none that can be used, and
// then the events that stand in it anywhere.
func (o *opening) readJournal() (*content, []incident.Event, error) {
	text, err := os.ReadFile(o.journal)
	switch {
	case errors.Is(err, os.ErrNotExist):
		return nil, nil, nil
	case errors.Is(err, os.ErrPermission):
		return nil, nil, err
	case err != nil:
		o.warn("The journal could not be read and is set aside (%v).", err)
		return nil, nil, nil
	}
	c, err := readContent(text)
	switch {
	case errors.Is(err, ErrNewer):
		return nil, nil, err
	case err != nil:
		o.warn("The journal was damaged and is set aside (%v).", err)
		return nil, carve(text), nil
	case c.skipped > 0:
		o.opt.Log.Warn("bytes in the journal are no entry, as after a power cut; they are left where they are", "bytes", c.skipped)
		return &c, carve(text), nil
	}
	return &c, nil, nil
}
