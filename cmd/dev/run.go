package main

import (
	"context"
	"errors"
	"fmt"
	"os"
)

// errProgram is wrapped by the error of a program that ran and failed; what is
// wrong it has said itself.
var errProgram = errors.New("the program failed")

// serveDemo builds what is missing and starts the demonstration. The program
// is asked to stop when this one is, and has the time it needs.
func serveDemo(ctx context.Context, args []string) error {
	if err := build(ctx); err != nil {
		return err
	}
	x := cmd(programBin, append([]string{"serve", "--demo"}, args...)...).exec(ctx)
	x.Stdin, x.Stdout, x.Stderr = os.Stdin, os.Stdout, os.Stderr
	err := x.Run()
	if err == nil || ctx.Err() != nil {
		return nil
	}
	return fmt.Errorf("%w: %w", errProgram, err)
}
