package main

import (
	"crypto/tls"
	"errors"
	"fmt"
	"log/slog"
	"net"
	"path/filepath"

	"wakeback/pwa"
	"wakeback/server"
)

type serveCmd struct {
	Listen   string   `help:"Address and port to serve on; ${listen} when left out." placeholder:"HOST:PORT"`
	Data     string   `help:"Folder that keeps everything; in the user's own configuration when left out." placeholder:"DIR" type:"path"`
	Journal  string   `help:"Folder on a second medium, such as a stick, for a second copy of the log." placeholder:"DIR" type:"path"`
	Feed     []string `help:"Instruments, best first; may be given more than once." placeholder:"URL" sep:"none"`
	Cert     string   `help:"Certificate of this server, a PEM file." placeholder:"FILE" type:"path" group:"tls"`
	Key      string   `help:"Key of the certificate, a PEM file." placeholder:"FILE" type:"path" group:"tls"`
	Plain    bool     `help:"Serve without TLS, on this machine only."`
	Demo     bool     `help:"Try it: an invented vessel under way, on this machine only, pairing open."`
	LogLevel string   `help:"How much to log: debug, info, warn or error." default:"info" placeholder:"LEVEL"`
}

// Help is shown by wakeback serve --help.
func (serveCmd) Help() string {
	return `Try it, with an invented vessel whose crew turns back when someone marks:

  wakeback serve --demo

On board, with the instruments on a network, and a spare on a serial cable:

  wakeback serve --cert boat.pem --key boat-key.pem --feed tcp://192.168.1.20:10110 --feed "serial:/dev/ttyUSB0?baud=4800"

Feeds: tcp://HOST:PORT, udp://:PORT, serial:/dev/NAME?baud=4800, file:PATH?pace=1 (replays a recording; pace 0 is as fast as it can).

Once it is ready it prints the address to open. Let phones in with: wakeback pair`
}

// defaultListen is where to serve when nothing else is said: this machine
// alone. The port is our choice, one that no service is registered for as far
// as we know.
const defaultListen = "127.0.0.1:8317"

// Run serves until it is stopped.
func (c *serveCmd) Run(e *env) error {
	cfg, err := c.config(e)
	if err != nil {
		return err
	}
	if c.Demo {
		stop, err := c.demo(e, &cfg, cfg.Log)
		if err != nil {
			return err
		}
		defer stop()
	} else if exists(filepath.Join(cfg.Data, invented)) {
		fmt.Fprintf(e.err, "WARNING: the folder %s holds incidents that a demonstration invented.\n", cfg.Data)
	}
	return server.Run(e.ctx, cfg)
}

// config reads the flags.
func (c *serveCmd) config(e *env) (server.Config, error) {
	var level slog.Level
	if err := level.UnmarshalText([]byte(c.LogLevel)); err != nil {
		return server.Config{}, badInput("--log-level", fmt.Errorf("%q, expected debug, info, warn or error", c.LogLevel))
	}
	cfg := server.Config{
		Listen: c.Listen, Data: c.Data, Journal: c.Journal, Feeds: c.Feed, Version: versionText(),
		Log:         slog.New(slog.NewTextHandler(e.err, &slog.HandlerOptions{Level: level})),
		OpenPairing: c.Demo, Demo: c.Demo, Ready: func(r server.Ready) { c.ready(e, r) },
	}
	if pwa.Built() {
		cfg.Page = pwa.FS
	}
	var err error
	if cfg.TLS, err = c.tls(); err != nil {
		return cfg, err
	}
	if cfg.Listen == "" {
		cfg.Listen = defaultListen
		if c.Demo && taken(cfg.Listen) {
			cfg.Listen = "127.0.0.1:0" // a trial has no address that phones know
		}
	}
	if !c.Demo {
		cfg.Data, err = dataDir(c.Data)
	}
	return cfg, err
}

// tls reads the certificate.
func (c *serveCmd) tls() (*tls.Config, error) {
	switch {
	case c.Plain || c.Demo:
		if c.Cert != "" || c.Key != "" {
			return nil, badInput("--cert and --key", errors.New("--plain and --demo serve without a certificate; leave one of the two out"))
		}
		return nil, nil
	case c.Cert == "" && c.Key == "":
		return nil, badInput("serve", errors.New("phones on a network need TLS: give --cert and --key; or use --plain or --demo, on this machine only"))
	case c.Cert == "" || c.Key == "":
		return nil, badInput("--cert and --key", errors.New("expected both or none"))
	}
	pair, err := tls.LoadX509KeyPair(c.Cert, c.Key)
	if err != nil {
		return nil, badInput("--cert and --key", err)
	}
	return &tls.Config{Certificates: []tls.Certificate{pair}, MinVersion: tls.VersionTLS12}, nil
}

// taken reports whether something else serves on an address.
func taken(addr string) bool {
	ln, err := net.Listen("tcp", addr)
	if err != nil {
		return true
	}
	ln.Close()
	return false
}

// ready prints where to open the page.
func (c *serveCmd) ready(e *env, r server.Ready) {
	for _, w := range r.Warnings {
		fmt.Fprintln(e.err, "WARNING:", w)
	}
	if code, err := qr(r.URL); err == nil {
		fmt.Fprint(e.out, code)
	}
	if !pwa.Built() {
		fmt.Fprintln(e.err, "WARNING: the page is not built into this program; only the API is served.")
	}
	if c.Demo {
		fmt.Fprintln(e.out, "A demonstration: the vessel, her instruments and the person are invented.")
	}
	fmt.Fprintln(e.out, "Open", r.URL)
	fmt.Fprintln(e.out, "This program calls nobody. In an emergency call for help by radio first.")
}
