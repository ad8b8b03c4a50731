package store

import (
	"bytes"
	"encoding/binary"
	"errors"
	"fmt"
	"hash/crc32"
	"io"
	"os"
	"path/filepath"
	"time"
)

// The journal is a file of frames behind a header:
//
//	header  "wakeback journal 1\n", 32 characters of epoch, "\n"
//	frame   length of the payload and CRC-32C of all that follows (both 4
//	        bytes, big endian), kind (1 byte), number of the change (8 bytes,
//	        0 for tracks), payload
//
// It only grows: about the size of the events, the documents and the tracks,
// some 100 kB for an hour under way. A frame that does not check ends it: what
// stands behind was never acknowledged, unless the medium itself is damaged.
const journalMagic = "wakeback journal 1\n"

// The kinds of frame.
const (
	frameEvents byte = 'E' // JSON array of events, one commit
	frameDoc    byte = 'D' // JSON docChange
	frameTrack  byte = 'T' // JSON trackChange; not flushed by itself
)

// maxFrame bounds a frame; a length beyond it is damage. A commit of a hundred
// events of 32 kB stays below.
const maxFrame = 8 << 20

var crcTable = crc32.MakeTable(crc32.Castagnoli)

// JournalFile is what the journal needs of a file; tests put a faulty one here.
type JournalFile interface {
	io.Writer
	Sync() error
	Close() error
}

type frame struct {
	kind    byte
	change  uint64 // counts commits of events and documents from 1
	payload []byte
}

// frameHead is the length of what stands before the payload.
const frameHead = 17

func appendFrame(dst []byte, f frame) []byte {
	dst = binary.BigEndian.AppendUint32(dst, uint32(len(f.payload)))
	at := len(dst)
	dst = append(dst, 0, 0, 0, 0, f.kind)
	dst = binary.BigEndian.AppendUint64(dst, f.change)
	dst = append(dst, f.payload...)
	binary.BigEndian.PutUint32(dst[at:], crc32.Checksum(dst[at+4:], crcTable))
	return dst
}

// scan is what a journal holds.
type scan struct {
	epoch  string
	frames []frame
	good   int64 // bytes up to the end of the last good frame
	torn   int64 // bytes behind it
}

// errJournal is wrapped when a file is no journal at all.
var errJournal = errors.New("not a journal")

const headerLen = len(journalMagic) + 32 + 1

func parseJournal(text []byte) (scan, error) {
	if len(text) < headerLen || !bytes.HasPrefix(text, []byte(journalMagic)) || text[headerLen-1] != '\n' {
		return scan{}, errJournal
	}
	s := scan{epoch: string(text[len(journalMagic) : headerLen-1]), good: int64(headerLen)}
	rest := text[headerLen:]
	for len(rest) >= frameHead {
		n := int(binary.BigEndian.Uint32(rest))
		if n > maxFrame || n > len(rest)-frameHead {
			break
		}
		end := frameHead + n
		if crc32.Checksum(rest[8:end], crcTable) != binary.BigEndian.Uint32(rest[4:]) {
			break
		}
		s.frames = append(s.frames, frame{kind: rest[8], change: binary.BigEndian.Uint64(rest[9:]), payload: rest[frameHead:end]})
		s.good += int64(end)
		rest = rest[end:]
	}
	s.torn = int64(len(rest))
	return s, nil
}

func header(epoch string) []byte { return []byte(journalMagic + epoch + "\n") }

// journal is the file, open for appending.
type journal struct {
	f   JournalFile
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

// setAside renames a file that cannot be used, so that nothing of it is lost.
func setAside(path, why string, now time.Time) (string, error) {
	to := fmt.Sprintf("%s.%s-%s", path, why, now.UTC().Format("20060102T150405.000"))
	if err := os.Rename(path, to); err != nil {
		return "", fmt.Errorf("set aside %s: %w", path, err)
	}
	return to, syncDir(filepath.Dir(path))
}

// syncDir flushes a folder, so that a name made or changed in it stays.
func syncDir(dir string) error {
	d, err := os.Open(dir)
	if err != nil {
		return fmt.Errorf("open folder %s: %w", dir, err)
	}
	defer d.Close()
	if err := d.Sync(); err != nil {
		return fmt.Errorf("flush folder %s: %w", dir, err)
	}
	return nil
}

// cutTail keeps what stands behind the last good frame in a file of its own
// and cuts it off.
func cutTail(path string, text []byte, good int64, now time.Time) (string, error) {
	kept := fmt.Sprintf("%s.torn-%s", path, now.UTC().Format("20060102T150405.000"))
	if err := writeFile(kept, text[good:]); err != nil {
		return "", err
	}
	if err := os.Truncate(path, good); err != nil {
		return "", fmt.Errorf("cut the torn end off %s: %w", path, err)
	}
	return kept, nil
}

// writeFile writes a whole file so that it is there whole or not at all.
func writeFile(path string, data []byte) error {
	tmp := path + ".new"
	f, err := os.OpenFile(tmp, os.O_CREATE|os.O_TRUNC|os.O_WRONLY, 0o600)
	if err != nil {
		return fmt.Errorf("write %s: %w", path, err)
	}
	_, err = f.Write(data)
	err = errors.Join(err, f.Sync(), f.Close())
	if err == nil {
		err = os.Rename(tmp, path)
	}
	if err != nil {
		return fmt.Errorf("write %s: %w", path, err)
	}
	return syncDir(filepath.Dir(path))
}
