package main

import (
	"errors"
	"fmt"
	"log/slog"

	"github.com/skip2/go-qrcode"

	"wakeback/pwa"
	"wakeback/server"
)

type serveCmd struct {
	Listen   string   `help:"Address to serve on." default:"127.0.0.1:8317" placeholder:"HOST:PORT"`
	Data     string   `help:"Folder that keeps everything; in the user's own configuration when left out." placeholder:"DIR" type:"path"`
	Journal  string   `help:"Folder on a second medium for the journal." placeholder:"DIR" type:"path"`
	Feed     []string `help:"Instruments, best first: tcp://host:port, udp://:port, serial:/dev/ttyUSB0?baud=4800, file:path?pace=1." placeholder:"URL" sep:"none"`
	Plain    bool     `help:"Serve plain HTTP, on this machine only."`
	Demo     bool     `help:"Serve an invented vessel under way, on this machine only, with pairing open."`
	LogLevel string   `help:"How much to log: debug, info, warn or error." default:"info" enum:"debug,info,warn,error"`
}

// Run serves until it is stopped.
func (c *serveCmd) Run(e *env) error {
	var level slog.Level
	if err := level.UnmarshalText([]byte(c.LogLevel)); err != nil {
		return badInput("--log-level", err)
	}
	log := slog.New(slog.NewTextHandler(e.err, &slog.HandlerOptions{Level: level}))
	cfg := server.Config{
		Listen: c.Listen, Data: c.Data, Journal: c.Journal, Feeds: c.Feed, Version: versionText(), Log: log,
		OpenPairing: c.Demo, Demo: c.Demo, Ready: func(r server.Ready) { c.ready(e, r) },
	}
	if pwa.Built() {
		cfg.Page = pwa.FS
	}
	if !c.Plain && !c.Demo {
		return badInput("serve", errors.New("TLS for the network on board is not built yet: use --plain or --demo on this machine"))
	}
	if c.Demo {
		stop, err := c.demo(e, &cfg, log)
		if err != nil {
			return err
		}
		defer stop()
	}
	var err error
	if cfg.Data, err = dataDir(cfg.Data); err != nil {
		return err
	}
	return server.Run(e.ctx, cfg)
}

// ready prints where to open the page.
func (c *serveCmd) ready(e *env, r server.Ready) {
	for _, w := range r.Warnings {
		fmt.Fprintln(e.out, "WARNING:", w)
	}
	if qr, err := qrcode.New(r.URL, qrcode.Medium); err == nil {
		fmt.Fprint(e.out, qr.ToSmallString(false))
	}
	if c.Demo {
		fmt.Fprintln(e.out, "A demonstration: the vessel, her instruments and the person are invented.")
	}
	fmt.Fprintln(e.out, "Open", r.URL)
	fmt.Fprintln(e.out, "This does not call for help. Use the radio.")
}
