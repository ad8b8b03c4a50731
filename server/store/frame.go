package store

import (
	"bytes"
	"encoding/binary"
	"hash/crc32"
	"strconv"
	"strings"
)

// A journal is a file of frames behind a header:
//
//	header  "wakeback journal 1\n", 32 characters of epoch, "\n"
//	frame   magic (4 bytes), CRC-32C of all that follows (4 bytes, big endian),
//	        length of the payload (4 bytes), kind (1 byte), number of the change
//	        (8 bytes, 0 for tracks), payload
//
// Nothing is ever cut off or written over. Bytes that are no frame, as the
// unfinished end that a power cut leaves, are stepped over: the next frame is
// found by its magic, and its checksum says that it is one. Whether something
// is missing is told by the numbers of the events and of the changes.
const (
	journalTitle   = "wakeback journal "
	journalVersion = 1
	headerLen      = len(journalTitle) + 1 + 1 + epochLen + 1
	epochLen       = 32
)

// frameMagic holds bytes that no UTF-8 text has, so that no note of a phone
// looks like a frame.
var frameMagic = []byte{0xf5, 'w', 'b', 0xff}

// The kinds of frame. A kind of a later version is stepped over.
const (
	frameEvents   byte = 'E' // JSON array of events, one commit
	frameDoc      byte = 'D' // JSON docChange
	frameDocs     byte = 'S' // JSON array of docChange: all documents there are
	frameConflict byte = 'C' // JSON of an event whose id is stored with other content
	frameTrack    byte = 'T' // trackChange; not flushed by itself
)

// frameHead is the length of what stands before the payload.
const frameHead = 21

// maxFrame bounds a frame; a length beyond it is damage. A commit of a hundred
// events of 32 kB stays below.
const maxFrame = 8 << 20

var crcTable = crc32.MakeTable(crc32.Castagnoli)

type frame struct {
	kind    byte
	change  uint64 // counts commits of events and documents from 1
	payload []byte
}

func appendFrame(dst []byte, f frame) []byte {
	dst = append(dst, frameMagic...)
	at := len(dst)
	dst = append(dst, 0, 0, 0, 0)
	dst = binary.BigEndian.AppendUint32(dst, uint32(len(f.payload)))
	dst = append(dst, f.kind)
	dst = binary.BigEndian.AppendUint64(dst, f.change)
	dst = append(dst, f.payload...)
	binary.BigEndian.PutUint32(dst[at:], crc32.Checksum(dst[at+4:], crcTable))
	return dst
}

// nextFrame reads the frame that text begins with. Its payload lies in text.
func nextFrame(text []byte) (f frame, size int, ok bool) {
	if len(text) < frameHead || !bytes.HasPrefix(text, frameMagic) {
		return frame{}, 0, false
	}
	n := int(binary.BigEndian.Uint32(text[8:]))
	if n > maxFrame || n > len(text)-frameHead {
		return frame{}, 0, false
	}
	size = frameHead + n
	if crc32.Checksum(text[8:size], crcTable) != binary.BigEndian.Uint32(text[4:]) {
		return frame{}, 0, false
	}
	return frame{kind: text[12], change: binary.BigEndian.Uint64(text[13:]), payload: text[frameHead:size]}, size, true
}

// frames calls fn for every frame, in order, and returns how many bytes were
// none.
func frames(text []byte, fn func(frame)) (skipped int) {
	for len(text) > 0 {
		f, size, ok := nextFrame(text)
		if ok {
			fn(f)
			text = text[size:]
			continue
		}
		next := bytes.Index(text[1:], frameMagic)
		if next < 0 {
			return skipped + len(text)
		}
		skipped += next + 1
		text = text[next+1:]
	}
	return skipped
}

func header(epoch string) []byte {
	return []byte(journalTitle + strconv.Itoa(journalVersion) + "\n" + epoch + "\n")
}

// parseHeader reads the epoch. One of a later version is told apart from one
// that is damaged.
func parseHeader(text []byte) (epoch string, newer, ok bool) {
	rest, found := strings.CutPrefix(string(text[:min(len(text), 64)]), journalTitle)
	if !found {
		return "", false, false
	}
	number, rest, _ := strings.Cut(rest, "\n")
	version, err := strconv.Atoi(number)
	if err != nil || version < 1 {
		return "", false, false
	}
	if version > journalVersion {
		return "", true, false
	}
	epoch, _, found = strings.Cut(rest, "\n")
	return epoch, false, found && isEpoch(epoch)
}

func isEpoch(s string) bool {
	return len(s) == epochLen && strings.Trim(s, "0123456789abcdef") == ""
}
