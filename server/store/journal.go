package store

import (
	"fmt"
	"io"
)

// journal is a journal's file, open for appending.
type journal struct {
	f   File
	buf []byte
}

// write appends a frame, and flushes it to the medium when asked to.
func (j *journal) write(f frame, flush bool) error {
	j.buf = appendFrame(j.buf[:0], f)
	if n, err := j.f.Write(j.buf); err != nil {
		return fmt.Errorf("write to the journal: %w", err)
	} else if n < len(j.buf) {
		return fmt.Errorf("write to the journal: %w", io.ErrShortWrite)
	}
	if !flush {
		return nil
	}
	if err := j.f.Sync(); err != nil {
		return fmt.Errorf("flush the journal: %w", err)
	}
	return nil
}
