//go:build unix

package store

import (
	"errors"
	"fmt"
	"os"
	"path/filepath"
	"syscall"
	"time"
)

// lockName is the file that a process holds while it has the store open. It
// is taken before anything is read: both logs are looked at, and mended, by
// one process only. The system lets go of it when the process ends, however
// it ends.
const lockName = "wakeback.lock"

// lockWait is how long opening waits for another process to let go, as for
// one that is just stopping. Our choice: a crew that starts a second server by
// mistake reads why within a second.
const lockWait = 700 * time.Millisecond

type lock struct{ f *os.File }

func takeLock(dir string) (*lock, error) {
	path := filepath.Join(dir, lockName)
	f, err := os.OpenFile(path, os.O_CREATE|os.O_RDWR, 0o600)
	if errors.Is(err, syscall.EROFS) || errors.Is(err, os.ErrPermission) {
		if g, openErr := os.Open(path); openErr == nil {
			f, err = g, nil // a folder that cannot be written can still be read
		}
	}
	if err != nil {
		return nil, err
	}
	for end := time.Now().Add(lockWait); ; time.Sleep(20 * time.Millisecond) {
		err := syscall.Flock(int(f.Fd()), syscall.LOCK_EX|syscall.LOCK_NB)
		if err == nil {
			return &lock{f}, nil
		}
		if !errors.Is(err, syscall.EWOULDBLOCK) || time.Now().After(end) {
			_ = f.Close()
			return nil, fmt.Errorf("%w: %s: %w", ErrLocked, path, err)
		}
	}
}

func (l *lock) release() error {
	if l == nil {
		return nil
	}
	return l.f.Close()
}
