package main

import (
	"context"
	"fmt"
	"os"
	"slices"
	"strings"
	"time"
)

// step is one part of the test run.
type step struct {
	name string
	what string
	run  func(context.Context) error
}

// steps in the order of what fails fastest.
var steps = []step{
	{"install", "programs that tests need", install},
	{"format", "gofmt", checkFormat},
	{"vet", "go vet and staticcheck", vet},
	{"engine", "drift and search for js/wasm", buildEngine},
	{"page", "types, lint and unit tests of the page", checkPage},
	{"build", "page and program", build},
	{"go", "all Go tests, with the race detector", goTests},
	{"fuzz", "every fuzz target for a moment", fuzz},
	{"browser", "the page in a real browser, against the real program", browser},
}

// test runs all steps, or those named, to the end, and counts.
func test(ctx context.Context, names []string) error {
	for _, n := range names {
		if !slices.ContainsFunc(steps, func(s step) bool { return s.name == n }) {
			return fmt.Errorf("no step %q; there are %s", n, stepNames())
		}
	}
	type result struct {
		step
		err  error
		took time.Duration
	}
	var results []result
	for _, s := range steps {
		if len(names) > 0 && !slices.Contains(names, s.name) {
			continue
		}
		fmt.Printf("\n== %s: %s\n", s.name, s.what)
		begin := time.Now()
		err := s.run(ctx)
		if err != nil {
			fmt.Println(err)
		}
		results = append(results, result{s, err, time.Since(begin)})
		if ctx.Err() != nil {
			return ctx.Err()
		}
	}
	fmt.Println()
	passed := 0
	for _, r := range results {
		verdict := "ok"
		if r.err != nil {
			verdict = "FAILED"
		} else {
			passed++
		}
		fmt.Printf("%-8s %-7s %6.1f s  %s\n", r.name, verdict, r.took.Seconds(), r.what)
	}
	fmt.Printf("%d passed, %d failed\n", passed, len(results)-passed)
	if passed < len(results) {
		return fmt.Errorf("%d of %d steps failed", len(results)-passed, len(results))
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

func checkFormat(ctx context.Context) error {
	out, err := cmd("gofmt", "-l", "cmd", "drift", "search", "server", "pwa/pwa.go").output(ctx)
	if err != nil {
		return err
	}
	if out != "" {
		return fmt.Errorf("gofmt would change:\n%s", out)
	}
	return nil
}

func vet(ctx context.Context) error {
	if err := cmd("go", "vet", "./...").run(ctx); err != nil {
		return err
	}
	return cmd("go", "tool", "staticcheck", "./...").run(ctx)
}

func checkPage(ctx context.Context) error {
	if err := packages(ctx); err != nil {
		return err
	}
	if err := cmd("npm", "run", "--silent", "check").in("pwa").run(ctx); err != nil {
		return err
	}
	return cmd("npm", "test", "--silent").in("pwa").run(ctx)
}

func goTests(ctx context.Context) error {
	return cmd("go", "test", "-race", "-timeout", "8m", "./...").run(ctx)
}

// fuzzTime is how long each target runs: enough to meet the seeds and their
// nearest neighbours.
const fuzzTime = "2s"

// fuzz runs every fuzz target of every package, each for a moment.
func fuzz(ctx context.Context) error {
	out, err := cmd("go", "list", "-f", "{{if or .TestGoFiles .XTestGoFiles}}{{.ImportPath}}{{end}}", "./...").output(ctx)
	if err != nil {
		return err
	}
	for _, pkg := range strings.Fields(out) {
		list, err := cmd("go", "test", "-list", "^Fuzz", pkg).output(ctx)
		if err != nil {
			return err
		}
		for _, target := range strings.Fields(list) {
			if !strings.HasPrefix(target, "Fuzz") {
				continue
			}
			c := cmd("go", "test", "-run", "^$", "-fuzz", "^"+target+"$", "-fuzztime", fuzzTime, "-parallel", "2", pkg)
			if out, err := c.output(ctx); err != nil {
				fmt.Print(out)
				return err
			}
			fmt.Printf("ok %s %s\n", pkg, target)
		}
	}
	return nil
}

func browser(ctx context.Context) error {
	if err := build(ctx); err != nil {
		return err
	}
	program, err := os.Getwd()
	if err != nil {
		return err
	}
	return cmd("npm", "run", "--silent", "e2e").in("pwa").with("WAKEBACK=" + program + "/" + programBin).run(ctx)
}

// bench prints the benchmarks that match.
func bench(ctx context.Context, args []string) error {
	pattern := "."
	if len(args) > 0 {
		pattern = args[0]
	}
	return cmd("go", "test", "-run", "^$", "-bench", pattern, "-benchmem", "./...").run(ctx)
}
