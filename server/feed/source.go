package feed

import (
	"context"
	"fmt"
	"io"
	"net"
	"os"
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
