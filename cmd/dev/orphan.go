package main

import (
	"context"
	"os"
	"time"
)

// untilOrphaned ends when the process that started this one is gone: go run
// does not hand on a request to end, and a server would stay behind.
func untilOrphaned(ctx context.Context) context.Context {
	ctx, cancel := context.WithCancel(ctx)
	parent := os.Getppid()
	go func() {
		defer cancel()
		tick := time.NewTicker(500 * time.Millisecond)
		defer tick.Stop()
		for parent == os.Getppid() {
			select {
			case <-ctx.Done():
				return
			case <-tick.C:
			}
		}
	}()
	return ctx
}
