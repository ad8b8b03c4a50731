package feed

import (
	"bufio"
	"context"
	"fmt"
	"os"
	"strconv"
	"sync"
	"time"
)

// RecordConfig says where all that the feeds say is written, sound or not. A
// recording has a line for each that was said:
//
//	2026-06-01T02:00:00.123456789Z 1 $GPRMC,...
//
// the moment of receipt in RFC 3339, the number of the feed from 1, and the line
// as it came, with bytes that are not printable ASCII written as "?". Lines that
// begin with # are comments. A file: feed plays it again.
type RecordConfig struct {
	// Path is the file that is written; "" means none. What is there already is
	// kept: it moves to Path.1 as in a rotation.
	Path string
	// MaxBytes is how large a file may grow before it becomes Path.1, and Path.1
	// Path.2 and so on; 0 means 16 MiB, about half a day of ten lines a second.
	MaxBytes int64
	// Files is how many files are kept, the one being written included; 0 means 4.
	Files int
}

// RecordStatus is how the recording is, for people to look at.
type RecordStatus struct {
	Path    string `json:"path"`
	Lines   uint64 `json:"lines"`   // written since the start
	Dropped uint64 `json:"dropped"` // not written: the disk was slow or refused them
	Reason  string `json:"reason,omitempty"`
}

const (
	defaultRecordBytes = 16 << 20
	defaultRecordFiles = 4
	// recordQueue is how many lines wait for a slow disk. Our choice: several
	// minutes of a busy feed, half a megabyte.
	recordQueue = 4096
	// recordFlush bounds what a power cut takes. Our choice.
	recordFlush = time.Second
	// recordRetry is how long a disk that refused is left alone. Our choice.
	recordRetry = 30 * time.Second
)

// recorder writes the recording in a goroutine of its own, so that a slow disk
// never holds up the instruments.
type recorder struct {
	cfg   RecordConfig
	lines chan recordLine

	mu     sync.Mutex // guards status
	status RecordStatus

	// What follows belongs to the goroutine that runs.
	file    *os.File
	buf     *bufio.Writer
	size    int64
	retryAt time.Time
}

type recordLine struct {
	at   time.Time
	feed int
	text string
}

// newRecorder checks the configuration and that the file can be written; nil
// when nothing is to be recorded.
func newRecorder(c RecordConfig) (*recorder, error) {
	if c.Path == "" {
		return nil, nil
	}
	if c.MaxBytes < 0 || c.Files < 0 {
		return nil, fmt.Errorf("recording: %d bytes in %d files, expected 0 or more of both", c.MaxBytes, c.Files)
	}
	if c.MaxBytes == 0 {
		c.MaxBytes = defaultRecordBytes
	}
	if c.Files == 0 {
		c.Files = defaultRecordFiles
	}
	r := &recorder{cfg: c, lines: make(chan recordLine, recordQueue), status: RecordStatus{Path: c.Path}}
	if err := r.open(); err != nil {
		return nil, err
	}
	return r, nil
}

// write takes a line; it never waits.
func (r *recorder) write(at time.Time, feed int, text string) {
	if r == nil {
		return
	}
	select {
	case r.lines <- recordLine{at, feed, text}:
	default:
		r.note(0, 1, "the disk is too slow")
	}
}

func (r *recorder) note(lines, dropped uint64, reason string) {
	r.mu.Lock()
	defer r.mu.Unlock()
	r.status.Lines += lines
	r.status.Dropped += dropped
	r.status.Reason = reason
}

func (r *recorder) state() RecordStatus {
	r.mu.Lock()
	defer r.mu.Unlock()
	return r.status
}

// run writes until ctx ends, then what still waits, and closes the file.
func (r *recorder) run(ctx context.Context) error {
	flush := time.NewTicker(recordFlush)
	defer flush.Stop()
	for {
		select {
		case l := <-r.lines:
			r.put(l)
		case <-flush.C:
			if r.buf != nil {
				r.failed(r.buf.Flush())
			}
		case <-ctx.Done():
			return r.end()
		}
	}
}

func (r *recorder) end() error {
	for {
		select {
		case l := <-r.lines:
			r.put(l)
		default:
			return r.shut()
		}
	}
}

// put writes one line. A disk that refuses ends nothing: the line is counted as
// dropped, and the file is opened anew after a while.
func (r *recorder) put(l recordLine) {
	if r.file == nil && (l.at.Before(r.retryAt) || r.failed(r.open())) {
		r.note(0, 1, r.state().Reason)
		return
	}
	text := recorded(l)
	if r.size > 0 && r.size+int64(len(text)) > r.cfg.MaxBytes {
		if r.failed(r.rotate()) {
			r.retryAt = l.at.Add(recordRetry)
			r.note(0, 1, r.state().Reason)
			return
		}
	}
	n, err := r.buf.Write(text)
	r.size += int64(n)
	if r.failed(err) {
		r.retryAt = l.at.Add(recordRetry)
		r.note(0, 1, r.state().Reason)
		return
	}
	r.note(1, 0, "")
}

// recorded is a line as the file has it.
func recorded(l recordLine) []byte {
	b := l.at.UTC().AppendFormat(make([]byte, 0, len(l.text)+40), time.RFC3339Nano)
	b = append(b, ' ')
	b = strconv.AppendInt(b, int64(l.feed), 10)
	b = append(b, ' ')
	for i := range len(l.text) {
		c := l.text[i]
		if c < ' ' || c > '~' {
			c = '?'
		}
		b = append(b, c)
	}
	return append(b, '\n')
}

// failed tells of an error, and gives the file up.
func (r *recorder) failed(err error) bool {
	if err == nil {
		return false
	}
	r.note(0, 0, err.Error())
	if r.file != nil {
		_ = r.file.Close() // it has failed already
		r.file, r.buf = nil, nil
	}
	return true
}

// open begins a new file; one that is there and not empty is kept as Path.1.
func (r *recorder) open() error {
	if info, err := os.Stat(r.cfg.Path); err == nil && info.Size() > 0 {
		if err := r.shift(); err != nil {
			return err
		}
	}
	f, err := os.OpenFile(r.cfg.Path, os.O_CREATE|os.O_WRONLY|os.O_TRUNC, 0o600)
	if err != nil {
		return fmt.Errorf("opening the recording: %w", err)
	}
	r.file, r.buf, r.size = f, bufio.NewWriter(f), 0
	return nil
}

func (r *recorder) rotate() error {
	if err := r.shut(); err != nil {
		return err
	}
	return r.open()
}

// shift moves Path to Path.1, Path.1 to Path.2 and so on; the last is dropped.
func (r *recorder) shift() error {
	for n := r.cfg.Files - 1; n > 0; n-- {
		err := os.Rename(r.numbered(n-1), r.numbered(n))
		if err != nil && !os.IsNotExist(err) {
			return fmt.Errorf("rotating the recording: %w", err)
		}
	}
	return nil
}

func (r *recorder) numbered(n int) string {
	if n == 0 {
		return r.cfg.Path
	}
	return r.cfg.Path + "." + strconv.Itoa(n)
}

func (r *recorder) shut() error {
	if r.file == nil {
		return nil
	}
	err := r.buf.Flush()
	if closing := r.file.Close(); err == nil {
		err = closing
	}
	r.file, r.buf = nil, nil
	if err != nil {
		return fmt.Errorf("closing the recording: %w", err)
	}
	return nil
}
