package store

import (
	"errors"
	"fmt"
	"io/fs"
	"syscall"

	berrors "go.etcd.io/bbolt/errors"

	"wakeback/search/incident"
)

// Errors of opening.
var (
	ErrLocked   = errors.New("another server is using this folder")
	ErrReadOnly = errors.New("the folder cannot be written to")
	ErrNewer    = errors.New("the store was written by a newer version of this program; it is left as it is")
)

// Errors of writing.
var (
	// ErrNotDurable is wrapped when the store cannot write, now and until it is
	// renewed or opened anew. Senders keep what they have.
	ErrNotDurable = errors.New("not saved: the store cannot write")
	ErrDiskFull   = errors.New("the disk is full")
)

// ConflictError says that an event of this id is stored with other content.
// The stored one stays; the other is kept aside: see [Store.Conflicts].
type ConflictError struct{ ID incident.EventID }

func (e *ConflictError) Error() string {
	return fmt.Sprintf("event %s is stored already, with other content", e.ID)
}

// classify adds what a person can do something about to an error of the system.
func classify(err error) error {
	switch {
	case err == nil, errors.Is(err, ErrDiskFull), errors.Is(err, ErrLocked), errors.Is(err, ErrReadOnly):
		return err
	case errors.Is(err, syscall.ENOSPC), errors.Is(err, syscall.EDQUOT), errors.Is(err, syscall.EFBIG), errors.Is(err, berrors.ErrMaxSizeReached):
		return fmt.Errorf("%w: %w", ErrDiskFull, err)
	case errors.Is(err, berrors.ErrTimeout):
		return fmt.Errorf("%w: %w", ErrLocked, err)
	case errors.Is(err, syscall.EROFS), errors.Is(err, fs.ErrPermission):
		return fmt.Errorf("%w: %w", ErrReadOnly, err)
	}
	return err
}
