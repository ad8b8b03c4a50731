package feed

import (
	"bufio"
	"context"
	"errors"
	"fmt"
	"io"
	"net"
	"os"
	"strings"
	"time"

	"go.bug.st/serial"
)

// dialTime is how long a connection may take to come about.
const dialTime = 5 * time.Second

// open opens what a feed reads from. listening is told the address of one
// that listens.
func open(ctx context.Context, s Spec, listening func(string)) (io.ReadCloser, error) {
	switch s.Kind {
	case TCP:
		d := net.Dialer{Timeout: dialTime, KeepAlive: 5 * time.Second}
		c, err := d.DialContext(ctx, "tcp", s.Addr)
		if err != nil {
			return nil, fmt.Errorf("connect: %w", err)
		}
		return c, nil
	case UDP:
		c, err := net.ListenPacket("udp", s.Addr)
		if err != nil {
			return nil, fmt.Errorf("listen: %w", err)
		}
		listening(c.LocalAddr().String())
		return &datagrams{c: c}, nil
	case Serial:
		p, err := serial.Open(s.Path, &serial.Mode{BaudRate: s.Baud})
		if err != nil {
			return nil, fmt.Errorf("open %s: %w", s.Path, err)
		}
		return p, nil
	case File:
		f, err := os.Open(s.Path)
		if err != nil {
			return nil, fmt.Errorf("open the recording: %w", err)
		}
		return f, nil
	}
	return nil, fmt.Errorf("%w: kind %q", ErrURL, s.Kind)
}

// datagrams reads datagrams as a stream, each ended by a line end of its own.
type datagrams struct {
	c    net.PacketConn
	rest []byte
	buf  [65535]byte
}

func (d *datagrams) Read(p []byte) (int, error) {
	if len(d.rest) == 0 {
		n, _, err := d.c.ReadFrom(d.buf[:len(d.buf)-1])
		if err != nil {
			return 0, err
		}
		d.buf[n] = '\n'
		d.rest = d.buf[:n+1]
	}
	n := copy(p, d.rest)
	d.rest = d.rest[n:]
	return n, nil
}

func (d *datagrams) Close() error { return d.c.Close() }

// errReplayed ends a recording that was replayed to its end.
var errReplayed = errors.New("the recording has ended")

// A recording has a line for each sentence: the moment in RFC 3339, a blank,
// the sentence. Lines that begin with # are left out.
func splitRecorded(line string) (at time.Time, sentence string, ok bool) {
	stamp, rest, found := strings.Cut(line, " ")
	if found {
		if t, err := time.Parse(time.RFC3339Nano, stamp); err == nil {
			return t, rest, true
		}
	}
	return time.Time{}, line, false
}

// replay says a recording's sentences at its pace. A bare sentence without a
// moment comes right after the one before.
func (f *Feeds) replay(ctx context.Context, s *source, in io.Reader) error {
	lines := bufio.NewScanner(in)
	var first time.Time
	began := f.cfg.Now()
	lineAt := began
	for lines.Scan() {
		if strings.HasPrefix(lines.Text(), "#") || lines.Text() == "" {
			continue
		}
		at, sentence, stamped := splitRecorded(lines.Text())
		if stamped {
			if first.IsZero() {
				first = at
			}
			lineAt = at
			if s.spec.Pace > 0 {
				due := began.Add(time.Duration(float64(at.Sub(first)) / s.spec.Pace))
				if err := wait(ctx, due.Sub(f.cfg.Now())); err != nil {
					return err
				}
			}
		}
		f.take(s, sentence, lineAt)
		if ctx.Err() != nil {
			return ctx.Err()
		}
	}
	if err := lines.Err(); err != nil {
		return fmt.Errorf("read the recording: %w", err)
	}
	return errReplayed
}

func wait(ctx context.Context, d time.Duration) error {
	if d <= 0 {
		return nil
	}
	t := time.NewTimer(d)
	defer t.Stop()
	select {
	case <-ctx.Done():
		return ctx.Err()
	case <-t.C:
		return nil
	}
}
