package store

import (
	"context"
	"encoding/json"
	"errors"
	"fmt"
	"io"
	"os"
	"os/exec"
	"sync/atomic"
	"syscall"
	"time"

	"go.etcd.io/bbolt"

	"wakeback/search/incident"
)

// The checker's environment: which file to walk, and that it holds tracks.
const (
	checkEnv  = "WAKEBACK_STORE_CHECK"
	tracksEnv = "WAKEBACK_STORE_CHECK_TRACKS"
)

// hooked is set when the program calls CheckMain first thing, so that it can
// be started again as a checker.
var hooked atomic.Bool

// verdict is what a checker found.
type verdict struct {
	State   state        `json:"state"`
	Problem string       `json:"problem"` // of one that is not good
	Epoch   string       `json:"epoch"`
	LastSeq incident.Seq `json:"last_seq"`
}

// state of a file.
type state string

const (
	absent  state = "absent"
	good    state = "good"
	damaged state = "damaged"
	locked  state = "locked" // by a program that does not know the lock file
	newer   state = "newer"
	denied  state = "denied" // may not be read
)

// CheckMain has to be called first thing in the program's main, and in
// TestMain of tests that open stores. In a process that was started to check a
// file it does that, prints what it found, and does not return.
func CheckMain() {
	path := os.Getenv(checkEnv)
	if path == "" {
		hooked.Store(true)
		return
	}
	go func() { // the one who asked holds the other end: without it there is no one to tell
		_, _ = io.Copy(io.Discard, os.Stdin)
		leave(1)
	}()
	v := walk(path, os.Getenv(tracksEnv) != "", true)
	if err := json.NewEncoder(os.Stdout).Encode(v); err != nil {
		leave(1)
	}
	leave(0)
}

// leave ends a checker at once: os.Exit of a program built with the race
// detector waits a second first, and every opening would with it.
func leave(code int) { syscall.Exit(code) }

// walk reads a bbolt file. Most damage becomes a verdict; what ends the
// process instead is why this is meant for one of its own. pages asks for
// bbolt's own check of all pages too, which runs where a panic cannot be
// caught.
func walk(path string, ofTracks, pages bool) (v verdict) {
	err := guarded(func() error {
		db, err := bbolt.Open(path, 0o600, boltOptions(true, 0))
		if err != nil {
			return err
		}
		defer db.Close()
		return db.View(func(tx *bbolt.Tx) error {
			if err := checkSize(path, tx.Size()); err != nil {
				return err
			}
			if pages {
				for err := range tx.Check() {
					return fmt.Errorf("its own check: %w", err)
				}
			}
			if ofTracks {
				return walkTracks(tx)
			}
			im, err := readImage(tx)
			if err == nil {
				err = im.verify()
			}
			v = verdict{Epoch: im.epoch, LastSeq: incident.Seq(len(im.events))}
			return err
		})
	})
	v.State, v.Problem = stateOf(classify(err))
	return v
}

// checkSize finds a file that was cut short. bbolt's own check asks only for
// the pages that it looks at, and the rest would be a fault when it is read.
func checkSize(path string, want int64) error {
	info, err := os.Stat(path)
	if err == nil && info.Size() < want {
		err = fmt.Errorf("it is cut short: %d bytes of %d", info.Size(), want)
	}
	return err
}

// walkTracks visits all pages that say where the blocks are. Each block has
// its own checksum, looked at when it is read.
func walkTracks(tx *bbolt.Tx) error {
	b := tx.Bucket(bucketTracks)
	if b == nil {
		return errSchema
	}
	return b.ForEach(func(_, _ []byte) error { return nil })
}

func stateOf(err error) (state, string) {
	switch {
	case err == nil:
		return good, ""
	case errors.Is(err, ErrLocked):
		return locked, err.Error()
	case errors.Is(err, ErrNewer):
		return newer, err.Error()
	case errors.Is(err, os.ErrPermission):
		return denied, err.Error()
	}
	return damaged, err.Error()
}

// checkTime is how long a checker may take: opening has to end within five
// seconds, and what is left goes to rebuilding from the journal.
const checkTime = 3 * time.Second

// check walks a file in a process of its own; where the program cannot be
// started again as a checker, in this one, and unforked is true.
func check(ctx context.Context, path string, ofTracks bool) (v verdict, unforked bool) {
	if !exists(path) {
		return verdict{State: absent}, false
	}
	self, err := os.Executable()
	if err != nil || !hooked.Load() {
		return walk(path, ofTracks, false), true
	}
	ctx, cancel := context.WithTimeout(ctx, checkTime)
	defer cancel()
	cmd := exec.CommandContext(ctx, self)
	cmd.Env = append(os.Environ(), checkEnv+"="+path)
	if ofTracks {
		cmd.Env = append(cmd.Env, tracksEnv+"=1")
	}
	in, err := cmd.StdinPipe()
	if err != nil {
		return walk(path, ofTracks, false), true
	}
	defer in.Close()
	out, err := cmd.Output()
	if cmd.Process == nil {
		return walk(path, ofTracks, false), true // it could not be started
	}
	if jsonErr := json.Unmarshal(out, &v); err == nil && jsonErr == nil {
		return v, false
	}
	if ctx.Err() != nil {
		return verdict{State: damaged, Problem: fmt.Sprintf("reading it took longer than %s", checkTime)}, false
	}
	return verdict{State: damaged, Problem: fmt.Sprintf("reading it ended the process: %v", err)}, false
}
