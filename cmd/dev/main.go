// Command dev builds, runs, tests and measures the program. Go, Node and npm
// are all it assumes.
//
//	go run ./cmd/dev build          leaves the program at bin/wakeback
//	go run ./cmd/dev run [ARGS]     builds what is missing, then starts wakeback serve --demo ARGS
//	go run ./cmd/dev test [STEP..]  runs every test, or the steps named
//	go run ./cmd/dev bench [RE]     prints the benchmarks, each beside its floor
package main

import (
	"context"
	"fmt"
	"os"
	"os/signal"
	"syscall"
)

func main() {
	if err := run(os.Args[1:]); err != nil {
		fmt.Fprintln(os.Stderr, "dev:", err)
		os.Exit(1)
	}
}

const usage = "usage: go run ./cmd/dev build | run [ARGS] | test [STEP...] | bench [PATTERN]"

func run(args []string) error {
	ctx, stop := signal.NotifyContext(context.Background(), os.Interrupt, syscall.SIGTERM)
	defer stop()
	if len(args) == 0 {
		return fmt.Errorf("%s", usage)
	}
	if err := toRoot(); err != nil {
		return err
	}
	switch verb, rest := args[0], args[1:]; verb {
	case "build":
		return build(ctx)
	case "run":
		return serveDemo(ctx, rest)
	case "test":
		return test(ctx, rest)
	case "bench":
		return bench(ctx, rest)
	}
	return fmt.Errorf("unknown command %q\n%s", args[0], usage)
}
