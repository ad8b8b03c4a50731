// Command dev builds, runs, tests and measures the program. Go, Node and npm
// are all it assumes.
//
//	go run ./cmd/dev build            leaves the program at bin/wakeback
//	go run ./cmd/dev run [ARGS]       builds what is missing, then starts wakeback serve --demo ARGS
//	go run ./cmd/dev test [STEP...]   runs every test, or the steps named
//	go run ./cmd/dev test -fast       leaves out the slow steps and the race detector
//	go run ./cmd/dev bench [PATTERN]  prints the benchmarks, each beside its aim
package main

import (
	"context"
	"errors"
	"fmt"
	"os"
	"os/exec"
	"os/signal"
	"syscall"
)

func main() {
	err := run(os.Args[1:])
	var exit *exec.ExitError
	switch {
	case err == nil:
	case errors.As(err, &exit) && exit.ExitCode() > 0 && errors.Is(err, errProgram):
		os.Exit(exit.ExitCode())
	default:
		fmt.Fprintln(os.Stderr, "dev:", err)
		os.Exit(1)
	}
}

const usage = "usage: go run ./cmd/dev build | run [ARGS] | test [-fast] [-only STEP,...] [STEP...] | bench [PATTERN]"

func run(args []string) error {
	ctx, stop := signal.NotifyContext(context.Background(), os.Interrupt, syscall.SIGTERM)
	defer stop()
	if len(args) == 0 {
		return errors.New(usage)
	}
	if err := toRoot(); err != nil {
		return err
	}
	ctx = untilOrphaned(ctx)
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
