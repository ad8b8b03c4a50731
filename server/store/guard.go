package store

import (
	"errors"
	"fmt"
	"runtime/debug"
)

// errFault is wrapped when bbolt panicked, or a page of its memory map could
// not be read, as when a card was pulled out.
var errFault = errors.New("a fault in the file")

// guarded runs fn and turns a panic in this goroutine into an error: a disk
// that dies must not take the guidance with it.
func guarded(fn func() error) (err error) {
	defer debug.SetPanicOnFault(debug.SetPanicOnFault(true))
	defer func() {
		if r := recover(); r != nil {
			err = fmt.Errorf("%w: %v", errFault, r)
		}
	}()
	return fn()
}
