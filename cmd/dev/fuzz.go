package main

import (
	"context"
	"errors"
	"fmt"
	"strings"
	"time"
)

// How long the fuzz targets run: enough to meet the seeds and their nearest
// neighbours, and together no longer than fuzzAll. Our choice, to keep the
// whole test run short; who mends a parser runs its target for longer.
const (
	fuzzEach = 3 * time.Second
	fuzzAll  = 75 * time.Second
)

// target is a fuzz target of a package.
type target struct{ pkg, name string }

// fuzz runs every fuzz target of every package, each for a moment.
func fuzz(ctx context.Context, _ options) error {
	targets, err := fuzzTargets(ctx)
	if err != nil {
		return err
	}
	if len(targets) == 0 {
		return errors.New("no fuzz target was found")
	}
	each := min(fuzzEach, fuzzAll/time.Duration(len(targets))).Round(100 * time.Millisecond)
	fmt.Printf("%d targets, %s each\n", len(targets), each)
	var failed []error
	for _, t := range targets {
		out, err := cmd("go", "test", "-run", "^$", "-fuzz", "^"+t.name+"$", "-fuzztime", each.String(), "-parallel", "2", t.pkg).output(ctx)
		if err != nil {
			fmt.Print(out)
			failed = append(failed, fmt.Errorf("%s %s: %w", t.pkg, t.name, err))
			continue
		}
		fmt.Println("ok", t.pkg, t.name)
	}
	return errors.Join(failed...)
}

// fuzzTargets finds them by asking the tests. The Go tool prints the names of
// a package before the package's own line.
func fuzzTargets(ctx context.Context) ([]target, error) {
	out, err := cmd("go", "test", "-list", "^Fuzz", "./...").output(ctx)
	if err != nil {
		return nil, fmt.Errorf("find the fuzz targets: %w\n%s", err, out)
	}
	return parseTargets(out), nil
}

func parseTargets(out string) []target {
	var all []target
	var names []string
	for line := range strings.Lines(out) {
		fields := strings.Fields(line)
		switch {
		case len(fields) == 1 && strings.HasPrefix(fields[0], "Fuzz"):
			names = append(names, fields[0])
		case len(fields) >= 2 && fields[0] == "ok":
			for _, n := range names {
				all = append(all, target{fields[1], n})
			}
			names = nil
		}
	}
	return all
}
