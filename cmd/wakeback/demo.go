package main

import (
	"context"
	"log/slog"
	"strings"
	"sync"

	"wakeback/server"
	"wakeback/server/demo"
)

// demo starts the invented vessel and makes the configuration hers. What is
// stored goes into a folder of its own, gone at the end, unless one was named:
// a demonstration must not stand among real incidents.
func (c *serveCmd) demo(e *env, cfg *server.Config, log *slog.Logger) (stop func(), err error) {
	v, err := demo.New(demo.Config{Seed: 1, Now: e.now, Log: log})
	if err != nil {
		return nil, err
	}
	dir, cleanup, err := demoDir(cfg.Data)
	if err != nil {
		return nil, err
	}
	cfg.Data = dir
	cfg.Feeds = append([]string{v.FeedURL()}, cfg.Feeds...)
	ctx, cancel := context.WithCancel(e.ctx)
	var sailing sync.WaitGroup
	shown := cfg.Ready
	cfg.Ready = func(r server.Ready) {
		shown(r)
		sailing.Go(func() { v.Run(ctx, demo.AskServer(strings.TrimSuffix(r.URL, "/"))) })
	}
	return func() { cancel(); sailing.Wait(); cleanup() }, nil
}
