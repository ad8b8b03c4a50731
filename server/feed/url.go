package feed

import (
	"errors"
	"fmt"
	"math"
	"net"
	"net/url"
	"strconv"
	"strings"

	"wakeback/server/feed/nmea"
)

// ErrURL is wrapped by every error about the address of a feed.
var ErrURL = errors.New("not a feed")

const wantURL = "tcp://HOST:PORT, udp://:PORT, serial:/dev/NAME?baud=4800 or file:PATH?pace=1"

// Kind is the kind of a feed.
type Kind string

// The kinds.
const (
	TCP    Kind = "tcp"
	UDP    Kind = "udp"
	Serial Kind = "serial"
	File   Kind = "file"
	// Injected is what the program itself says, by [Feeds.Inject].
	Injected Kind = "injected"
)

// Spec is the address of a feed, taken apart.
//
//	tcp://host:port                     connects and listens
//	udp://:port, udp://address:port     listens for datagrams
//	serial:/dev/ttyUSB0?baud=4800       reads a serial port, 8N1; 4800 baud when not said
//	file:path?pace=1                    replays a recording; pace 2 is twice as fast,
//	                                    0 as fast as it can; 1 when not said
//
// Every kind takes checksum=optional, for an instrument that never sends one.
type Spec struct {
	URL      string
	Kind     Kind
	Addr     string // host:port of tcp and udp
	Path     string // device or file
	Baud     int
	Pace     float64
	Checksum nmea.ChecksumRule
}

// ParseURL takes the address of a feed apart. Errors wrap [ErrURL] and say what
// was expected.
func ParseURL(raw string) (Spec, error) {
	scheme, rest, ok := strings.Cut(raw, ":")
	if !ok {
		return Spec{}, urlError(raw, "no scheme, expected "+wantURL)
	}
	place, query, _ := strings.Cut(rest, "?")
	s := Spec{URL: raw, Kind: Kind(scheme)}
	var err error
	switch s.Kind {
	case TCP, UDP:
		s.Addr, err = parseAddr(s.Kind, place)
	case Serial, File:
		s.Path, err = parsePath(s.Kind, place)
	default:
		err = fmt.Errorf("scheme %q is not known, expected %s", scheme, wantURL)
	}
	if err == nil {
		err = s.parseQuery(query)
	}
	if err != nil {
		return Spec{}, urlError(raw, err.Error())
	}
	return s, nil
}

func urlError(raw, what string) error { return fmt.Errorf("%w: %q: %s", ErrURL, raw, what) }

func parseAddr(kind Kind, place string) (string, error) {
	addr, ok := strings.CutPrefix(place, "//")
	if !ok {
		return "", fmt.Errorf("expected %s://HOST:PORT", kind)
	}
	host, port, err := net.SplitHostPort(addr)
	if err != nil {
		return "", fmt.Errorf("address %q, expected HOST:PORT", addr)
	}
	// Port 0 is for udp only: the system chooses one, which the status tells.
	if n, err := strconv.Atoi(port); err != nil || n < 0 || n > 65535 || n == 0 && kind == TCP {
		return "", fmt.Errorf("port %q, expected 1 to 65535", port)
	}
	if host == "" && kind == TCP {
		return "", errors.New("no host, expected tcp://HOST:PORT")
	}
	return addr, nil
}

func parsePath(kind Kind, place string) (string, error) {
	path, err := url.PathUnescape(strings.TrimPrefix(place, "//"))
	if err != nil {
		return "", fmt.Errorf("path %q: %w", place, err)
	}
	if path == "" {
		return "", fmt.Errorf("no path, expected %s", map[Kind]string{Serial: "serial:/dev/NAME?baud=4800", File: "file:PATH?pace=1"}[kind])
	}
	return path, nil
}

func (s *Spec) parseQuery(query string) error {
	if s.Kind == Serial {
		s.Baud = 4800 // the speed of NMEA 0183; 38400 is its high-speed form
	}
	if s.Kind == File {
		s.Pace = 1
	}
	values, err := url.ParseQuery(query)
	if err != nil {
		return fmt.Errorf("options %q: %w", query, err)
	}
	for key, all := range values {
		if len(all) != 1 {
			return fmt.Errorf("option %q is given %d times, expected once", key, len(all))
		}
		if err := s.option(key, all[0]); err != nil {
			return err
		}
	}
	return nil
}

func (s *Spec) option(key, value string) error {
	switch {
	case key == "baud" && s.Kind == Serial:
		n, err := strconv.Atoi(value)
		if err != nil || n < 300 || n > 4_000_000 {
			return fmt.Errorf("baud %q, expected a speed such as 4800 or 38400", value)
		}
		s.Baud = n
	case key == "pace" && s.Kind == File:
		p, err := strconv.ParseFloat(value, 64)
		if err != nil || math.IsNaN(p) || p < 0 || p > 1000 {
			return fmt.Errorf("pace %q, expected 0 (as fast as it can) to 1000", value)
		}
		s.Pace = p
	case key == "checksum":
		if value != "optional" && value != "required" {
			return fmt.Errorf("checksum %q, expected required or optional", value)
		}
		if value == "optional" {
			s.Checksum = nmea.ChecksumOptional
		}
	default:
		return fmt.Errorf("option %q is not known for %s", key, s.Kind)
	}
	return nil
}
