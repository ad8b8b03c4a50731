package main

import (
	"bytes"
	"context"
	"fmt"
	"io"
	"os"
	"strconv"
	"strings"
)

// bench runs the benchmarks that match, then shows what has an aim beside it.
func bench(ctx context.Context, args []string) error {
	pattern := "."
	if len(args) > 0 {
		pattern = args[0]
	}
	var out bytes.Buffer
	// One package after the other: two at once would measure each other.
	x := cmd("go", "test", "-run", "^$", "-bench", pattern, "-benchtime", "300ms", "-p", "1", "-timeout", "20m", "./...").exec(ctx)
	x.Stdout, x.Stderr = io.MultiWriter(os.Stdout, &out), os.Stderr
	err := x.Run()
	printAims(os.Stdout, parseBench(out.String()))
	if err != nil {
		return fmt.Errorf("go test -bench: %w", err)
	}
	return nil
}

// measured is what a benchmark reported: value by unit, under the name without
// the number of processors.
type measured map[string]map[string]float64

func parseBench(out string) measured {
	m := make(measured)
	for line := range strings.Lines(out) {
		fields := strings.Fields(line)
		if len(fields) < 4 || !strings.HasPrefix(fields[0], "Benchmark") {
			continue
		}
		name := strings.TrimPrefix(fields[0], "Benchmark")
		if cut := strings.LastIndexByte(name, '-'); cut > 0 {
			if _, err := strconv.Atoi(name[cut+1:]); err == nil {
				name = name[:cut]
			}
		}
		values := make(map[string]float64)
		for i := 2; i+1 < len(fields); i += 2 {
			if v, err := strconv.ParseFloat(fields[i], 64); err == nil {
				values[fields[i+1]] = v
			}
		}
		m[name] = values
	}
	return m
}

// printAims prints the benchmarks that have an aim.
func printAims(w io.Writer, m measured) {
	fmt.Fprintf(w, "\n%-62s  %12s  %-22s  %s\n", "what", "measured", "aim", "reached")
	for _, a := range aims {
		v, ok := a.value(m)
		if !ok {
			continue
		}
		reached := "yes"
		if a.atLeast && v < a.limit || !a.atLeast && v > a.limit {
			reached = "NO"
		}
		fmt.Fprintf(w, "%-62s  %12s  %-22s  %s\n", a.what, figure(v)+" "+a.unit, a.aim(), reached)
	}
}

func figure(v float64) string { return strconv.FormatFloat(v, 'g', 3, 64) }
