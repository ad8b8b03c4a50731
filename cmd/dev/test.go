package main

import (
	"context"
	"errors"
	"flag"
	"fmt"
	"io"
	"os"
	"slices"
	"strings"
	"time"
)

// step is one part of the test run.
type step struct {
	name string
	what string
	slow bool // left out by -fast
	run  func(context.Context, options) error
}

// options are how to test.
type options struct {
	fast bool
	// strict: what is missing on the machine fails the run instead of leaving a
	// step out. It is so where a machine tests by itself (CI=true).
	strict bool
}

// steps in the order of what fails soonest.
var steps = []step{
	{"install", "programs that the tests need", false, install},
	{"format", "gofmt", false, checkFormat},
	{"vet", "go vet and staticcheck", false, vet},
	{"engine", "drift and search for js/wasm", false, checkEngine},
	{"page", "types, lint and unit tests of the page", false, checkPage},
	{"build", "engine, page and program", false, func(ctx context.Context, _ options) error { return build(ctx) }},
	{"go", "Go tests; server and commands with the race detector unless -fast", false, goTests},
	{"fuzz", "every fuzz target for a moment", true, fuzz},
	{"browser", "the page in a real browser", true, browser},
}

// errSkipped is wrapped by a step that the machine does not allow.
var errSkipped = errors.New("left out")

type result struct {
	step
	err  error
	took time.Duration
}

func (r result) verdict() string {
	switch {
	case r.err == nil:
		return "ok"
	case errors.Is(r.err, errSkipped):
		return "left out"
	}
	return "FAILED"
}

// test runs the steps to the end and counts.
func test(ctx context.Context, args []string) error {
	chosen, opt, err := choose(args)
	if err != nil {
		return err
	}
	began := time.Now()
	var results []result
	for _, s := range chosen {
		fmt.Printf("\n== %s: %s\n", s.name, s.what)
		begin := time.Now()
		err := s.run(ctx, opt)
		if ctx.Err() != nil {
			return errors.New("stopped")
		}
		if err != nil {
			fmt.Println(err)
		}
		results = append(results, result{s, err, time.Since(begin)})
	}
	return summary(os.Stdout, results, time.Since(began))
}

// choose reads the flags and the names of steps.
func choose(args []string) ([]step, options, error) {
	flags := flag.NewFlagSet("test", flag.ContinueOnError)
	only := flags.String("only", "", "steps to run, separated by commas: "+stepNames())
	fast := flags.Bool("fast", false, "leave out the slow steps and the race detector")
	if err := flags.Parse(args); err != nil {
		return nil, options{}, err
	}
	names := flags.Args()
	if *only != "" {
		names = append(names, strings.Split(*only, ",")...)
	}
	for _, n := range names {
		if !slices.ContainsFunc(steps, func(s step) bool { return s.name == n }) {
			return nil, options{}, fmt.Errorf("no step %q; there are %s", n, stepNames())
		}
	}
	var chosen []step
	for _, s := range steps {
		if slices.Contains(names, s.name) || len(names) == 0 && !(*fast && s.slow) {
			chosen = append(chosen, s)
		}
	}
	ci := os.Getenv("CI")
	return chosen, options{fast: *fast, strict: ci != "" && ci != "false" && ci != "0"}, nil
}

func summary(w io.Writer, results []result, took time.Duration) error {
	fmt.Fprintln(w)
	count := map[string]int{}
	for _, r := range results {
		count[r.verdict()]++
		fmt.Fprintf(w, "%-8s  %-8s  %6.1f s  %s\n", r.name, r.verdict(), r.took.Seconds(), r.what)
	}
	fmt.Fprintf(w, "in all %.0f s", took.Seconds())
	if n := count["left out"]; n > 0 {
		fmt.Fprintf(w, ", %d left out", n)
	}
	fmt.Fprintf(w, "\n%d passed, %d failed\n", count["ok"], count["FAILED"])
	if n := count["FAILED"]; n > 0 {
		return fmt.Errorf("%d of %d steps failed", n, len(results))
	}
	return nil
}

func stepNames() string {
	var names []string
	for _, s := range steps {
		names = append(names, s.name)
	}
	return strings.Join(names, ", ")
}
