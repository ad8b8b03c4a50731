package store

import (
	"context"
	"encoding/json"
	"errors"
	"fmt"
	"os"
	"os/exec"
	"runtime/debug"
	"sync/atomic"
	"time"

	"go.etcd.io/bbolt"

	"wakeback/search/incident"
)

// checkEnv names the file that a process started as a checker walks.
const checkEnv = "WAKEBACK_STORE_CHECK"

// hooked is set when the program calls CheckMain first thing, so that it can
// be started again as a checker.
var hooked atomic.Bool

// verdict is what a checker found.
type verdict struct {
	Epoch   string       `json:"epoch"`
	LastSeq incident.Seq `json:"last_seq"`
	Locked  bool         `json:"locked"`
	Newer   bool         `json:"newer"`
	Problem string       `json:"problem"` // "" when the file is good
}

// CheckMain has to be called first thing in the program's main, and in
// TestMain of tests that open stores. In a process that was started to check a
// file it does that, prints what it found, and does not return.
func CheckMain() {
	path := os.Getenv(checkEnv)
	if path == "" {
		hooked.Store(true)
		return
	}
	v := walk(path)
	if err := json.NewEncoder(os.Stdout).Encode(v); err != nil {
		os.Exit(1)
	}
	os.Exit(0)
}

// walk reads a whole bbolt file. Faults of the memory map, as of a file that
// was cut short, become panics and so a verdict; what cannot be caught ends
// this process, which is why it is one of its own.
func walk(path string) (v verdict) {
	defer debug.SetPanicOnFault(debug.SetPanicOnFault(true))
	defer func() {
		if r := recover(); r != nil {
			v = verdict{Problem: fmt.Sprintf("reading it failed: %v", r)}
		}
	}()
	db, err := bbolt.Open(path, 0o600, boltOptions(true, 0))
	if err != nil {
		err = classify(err)
		return verdict{Problem: err.Error(), Locked: errors.Is(err, ErrLocked)}
	}
	defer db.Close()
	im, err := readImage(db)
	if err == nil {
		err = im.verify()
	}
	if err != nil {
		return verdict{Problem: err.Error(), Newer: errors.Is(err, ErrNewer)}
	}
	return verdict{Epoch: im.epoch, LastSeq: incident.Seq(len(im.events))}
}

// checkTime is how long a checker may take: opening has to end within five
// seconds, and what is left goes to rebuilding from the journal.
const checkTime = 3 * time.Second

// check walks a file in a process of its own; where the program cannot be
// started again as a checker, in this one.
func check(ctx context.Context, path string) verdict {
	self, err := os.Executable()
	if err != nil || !hooked.Load() {
		return walk(path)
	}
	ctx, cancel := context.WithTimeout(ctx, checkTime)
	defer cancel()
	cmd := exec.CommandContext(ctx, self)
	cmd.Env = append(os.Environ(), checkEnv+"="+path)
	out, err := cmd.Output()
	var v verdict
	if jsonErr := json.Unmarshal(out, &v); err == nil && jsonErr == nil {
		return v
	}
	if ctx.Err() != nil {
		return verdict{Problem: fmt.Sprintf("reading it took longer than %s", checkTime)}
	}
	return verdict{Problem: fmt.Sprintf("reading it ended the process: %v", err)}
}
