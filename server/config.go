package server

import (
	"crypto/tls"
	"errors"
	"fmt"
	"io/fs"
	"log/slog"
	"net"
	"slices"
	"time"
)

// Config says what a server is to do. The zero value of a field means what
// stands beside it.
type Config struct {
	// Listen is HOST:PORT. Port 0 lets the system choose: see Ready.
	Listen string
	// Data is the folder of the store and of the admin socket.
	Data string
	// Journal is a folder on a second medium for the store's journal; "" keeps
	// it beside the store.
	Journal string
	// Feeds are the URLs of the instruments, best first.
	Feeds []string
	// TLS is the server's certificate; nil means plain HTTP, which only an
	// address of the machine itself is given.
	TLS *tls.Config
	// OpenPairing makes whoever asks a skipper. Only for a trial on loopback.
	OpenPairing bool
	// Demo is told to the page, so that nobody takes an invented vessel for a
	// real one.
	Demo bool
	// Names are further host names and addresses under which the server may be
	// asked for.
	Names []string
	// Page is what Vite built; nil serves the API alone.
	Page fs.FS
	// Version is told by /status.
	Version string
	// Log gets the log; nil discards it.
	Log *slog.Logger
	// Now is the clock; nil means time.Now.
	Now func() time.Time
	// MaxStreams is how many streams may be open; 64.
	MaxStreams int
	// Ready is called once the server answers.
	Ready func(Ready)
}

// Ready tells where a server answers.
type Ready struct {
	Addr net.Addr
	URL  string // of the page
	// Warnings are what the crew has to be told loudly, in full sentences.
	Warnings []string
}

// ErrConfig is wrapped by errors of a configuration that cannot be served.
var ErrConfig = errors.New("cannot serve so")

func (c Config) withDefaults() Config {
	if c.Log == nil {
		c.Log = slog.New(slog.DiscardHandler)
	}
	if c.Now == nil {
		c.Now = time.Now
	}
	if c.MaxStreams == 0 {
		c.MaxStreams = 64
	}
	return c
}

// check refuses what would lay the server open: plain HTTP, or open pairing,
// on an address that others can reach.
func (c Config) check() error {
	host, _, err := net.SplitHostPort(c.Listen)
	if err != nil {
		return fmt.Errorf("%w: listen address %q, expected HOST:PORT, such as 127.0.0.1:8080: %w", ErrConfig, c.Listen, err)
	}
	loopback := isLoopback(host)
	switch {
	case c.TLS == nil && !loopback:
		return fmt.Errorf("%w: plain HTTP on %q could be read and changed by anyone on the network. Use an address of this machine (127.0.0.1, ::1 or localhost), or serve with TLS", ErrConfig, c.Listen)
	case c.OpenPairing && !loopback:
		return fmt.Errorf("%w: open pairing on %q would let anyone on the network decide. Use an address of this machine, such as 127.0.0.1", ErrConfig, c.Listen)
	case c.Data == "":
		return fmt.Errorf("%w: no data folder, expected one that can be written to", ErrConfig)
	}
	return nil
}

// names are the host names under which the server may be asked for: those
// given, those of its certificate, and the one it listens on. Addresses of
// this machine are known by the connections that come in on them.
func (c Config) names() []string {
	names := slices.Clone(c.Names)
	if c.TLS != nil {
		for _, cert := range c.TLS.Certificates {
			if leaf := cert.Leaf; leaf != nil {
				names = append(names, leaf.DNSNames...)
				for _, ip := range leaf.IPAddresses {
					names = append(names, ip.String())
				}
			}
		}
	}
	if host, _, err := net.SplitHostPort(c.Listen); err == nil && host != "" {
		if ip := net.ParseIP(host); ip == nil || !ip.IsUnspecified() {
			names = append(names, host)
		}
	}
	return names
}

// isLoopback reports whether a host is this machine alone. A name other than
// localhost is not asked for: what it means can change.
func isLoopback(host string) bool {
	if host == "localhost" {
		return true
	}
	ip := net.ParseIP(host)
	return ip != nil && ip.IsLoopback()
}
