package store

import (
	"bytes"
	"encoding/binary"
	"fmt"
	"time"

	"go.etcd.io/bbolt"

	"wakeback/drift/nav"
)

// trackKey sorts by device, then by time, also before 1970: a clock that was
// never set must not put its fixes at the end.
func trackKey(device string, at time.Time) []byte {
	return binary.BigEndian.AppendUint64([]byte(device+"\x00"), uint64(at.UnixMilli())^(1<<63))
}

// putTrack adds fixes, in order of time: to the device's newest block while
// there is room in it and they are later, else in blocks of their own.
func putTrack(b *bbolt.Bucket, device string, fixes []nav.Fix) error {
	if last, old := lastBlock(b, device); last != nil && fixes[0].At.After(old[len(old)-1].At) {
		n := fitting(append(old[:len(old):len(old)], fixes...)) - len(old)
		if n > 0 {
			if err := putBlock(b, device, last, append(old, fixes[:n]...)); err != nil {
				return err
			}
			fixes = fixes[n:]
		}
	}
	for len(fixes) > 0 {
		n := fitting(fixes)
		key, block := trackKey(device, fixes[0].At), fixes[:n]
		if taken := b.Get(key); taken != nil {
			// Fixes that came late, or a second time. Both blocks keep to the span.
			if old, err := decodeFixes(taken); err == nil {
				block = nav.NewTrack(append(old, block...)).Fixes()
			}
		}
		if err := putBlock(b, device, key, block); err != nil {
			return err
		}
		fixes = fixes[n:]
	}
	return nil
}

// fitting is how many of the fixes go into one block.
func fitting(fixes []nav.Fix) int {
	n := 1
	for n < min(len(fixes), blockFixes) && fixes[n].At.Sub(fixes[0].At) < blockSpan {
		n++
	}
	return n
}

func putBlock(b *bbolt.Bucket, device string, key []byte, fixes []nav.Fix) error {
	if err := b.Put(key, encodeFixes(fixes)); err != nil {
		return fmt.Errorf("write the track of %s: %w", device, err)
	}
	return nil
}

// lastBlock is the device's newest block; nil when there is none, or when it
// is full or does not check.
func lastBlock(b *bbolt.Bucket, device string) (key []byte, fixes []nav.Fix) {
	c := b.Cursor()
	k, v := seekLast(c, []byte(device+"\x01"))
	if k == nil || !bytes.HasPrefix(k, []byte(device+"\x00")) {
		return nil, nil
	}
	fixes, err := decodeFixes(v)
	if err != nil || len(fixes) == 0 || len(fixes) >= blockFixes {
		return nil, nil
	}
	return bytes.Clone(k), fixes
}

// seekLast goes to the last entry before a key.
func seekLast(c *bbolt.Cursor, before []byte) (k, v []byte) {
	if k, _ := c.Seek(before); k == nil {
		return c.Last()
	}
	return c.Prev()
}

// readTrack collects the fixes of a device between two moments. Blocks that
// do not check are left out and counted.
func readTrack(b *bbolt.Bucket, device string, from, to time.Time) (fixes []nav.Fix, damaged int) {
	prefix, end := []byte(device+"\x00"), trackKey(device, to)
	c := b.Cursor()
	for k, v := c.Seek(trackKey(device, from.Add(-blockSpan))); bytes.HasPrefix(k, prefix) && bytes.Compare(k, end) <= 0; k, v = c.Next() {
		block, err := decodeFixes(v)
		if err != nil {
			damaged++
			continue
		}
		for _, f := range block {
			if !f.At.Before(from) && !f.At.After(to) {
				fixes = append(fixes, f)
			}
		}
	}
	return fixes, damaged
}
