package main

import (
	"context"
	"errors"
	"fmt"
	"os"
	"os/exec"
	"path/filepath"
	"strings"
	"time"
)

// toRoot goes to the folder of go.mod.
func toRoot() error {
	dir, err := os.Getwd()
	if err != nil {
		return err
	}
	for {
		if _, err := os.Stat(filepath.Join(dir, "go.mod")); err == nil {
			return os.Chdir(dir)
		}
		up := filepath.Dir(dir)
		if up == dir {
			return errors.New("no go.mod in this folder or above it")
		}
		dir = up
	}
}

// command is a program to run, in a folder, with more environment.
type command struct {
	dir  string
	env  []string
	name string
	args []string
}

func cmd(name string, args ...string) command { return command{name: name, args: args} }

func (c command) in(dir string) command { c.dir = dir; return c }

func (c command) with(env ...string) command {
	c.env = append(append([]string(nil), c.env...), env...)
	return c
}

func (c command) String() string {
	return strings.Join(append(append(append([]string(nil), c.env...), c.name), c.args...), " ")
}

func (c command) exec(ctx context.Context) *exec.Cmd {
	x := exec.CommandContext(ctx, c.name, c.args...)
	x.Dir = c.dir
	x.Env = append(os.Environ(), c.env...)
	x.Cancel = func() error { return x.Process.Signal(os.Interrupt) }
	x.WaitDelay = 10 * time.Second
	return x
}

// run shows what the program prints.
func (c command) run(ctx context.Context) error {
	x := c.exec(ctx)
	x.Stdout, x.Stderr = os.Stdout, os.Stderr
	if err := x.Run(); err != nil {
		return fmt.Errorf("%s: %w", c, err)
	}
	return nil
}

// output returns what the program prints.
func (c command) output(ctx context.Context) (string, error) {
	x := c.exec(ctx)
	x.Stderr = os.Stderr
	out, err := x.Output()
	if err != nil {
		return string(out), fmt.Errorf("%s: %w", c, err)
	}
	return string(out), nil
}

// have reports whether a program is installed.
func have(name string) bool {
	_, err := exec.LookPath(name)
	return err == nil
}
