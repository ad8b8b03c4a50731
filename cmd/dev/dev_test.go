package main

import (
	"errors"
	"io"
	"os"
	"path/filepath"
	"slices"
	"strings"
	"testing"
	"time"
)

func TestChoose(t *testing.T) {
	t.Setenv("CI", "true")
	for _, test := range []struct {
		args []string
		want string // the steps' names, or the error
	}{
		{nil, "install format vet engine page build go fuzz browser"},
		{[]string{"-fast"}, "install format vet engine page build go"},
		{[]string{"-only", "vet,format"}, "format vet"},
		{[]string{"fuzz", "go"}, "go fuzz"},
		{[]string{"-fast", "fuzz"}, "fuzz"}, // named, so it is wanted
		{[]string{"lint"}, `no step "lint"; there are install, format, vet, engine, page, build, go, fuzz, browser`},
	} {
		chosen, opt, err := choose(test.args)
		var names []string
		for _, s := range chosen {
			names = append(names, s.name)
		}
		got := strings.Join(names, " ")
		if err != nil {
			got = err.Error()
		}
		if got != test.want {
			t.Errorf("choose(%v) = %s, want %s", test.args, got, test.want)
		}
		if err == nil && !opt.strict {
			t.Errorf("choose(%v) with CI=true is not strict", test.args)
		}
	}
}

// A failed step fails the run, one left out does not.
func TestSummary(t *testing.T) {
	ok, out := result{step: step{name: "a"}}, result{step: step{name: "b"}, err: errSkipped}
	if err := summary(io.Discard, []result{ok, out}, 0); err != nil {
		t.Errorf("summary = %v, want none", err)
	}
	if err := summary(io.Discard, []result{ok, out, {err: errors.New("no")}}, 0); err == nil {
		t.Error("summary of a failed step = nil, want an error")
	}
}

func TestParseTargets(t *testing.T) {
	out := "FuzzA\nFuzzB\nok  \twakeback/x\t0.01s\n?   \twakeback/y\t[no test files]\nok  \twakeback/z\t0.01s\nFuzzC\nok  \twakeback/w\t(cached)\n"
	want := []target{{"wakeback/x", "FuzzA"}, {"wakeback/x", "FuzzB"}, {"wakeback/w", "FuzzC"}}
	if got := parseTargets(out); !slices.Equal(got, want) {
		t.Errorf("parseTargets = %v, want %v", got, want)
	}
}

func TestParseBench(t *testing.T) {
	m := parseBench("goos: linux\nBenchmarkA/one_two-2   \t 100\t 12.5 ns/op\t 1.25 x-floor\nBenchmarkB \t 1\t 3 ns/op\nPASS\n")
	if m["A/one_two"]["x-floor"] != 1.25 || m["A/one_two"]["ns/op"] != 12.5 || m["B"]["ns/op"] != 3 {
		t.Errorf("parseBench = %v", m)
	}
	a := aim{of: reading{"A/one_two", "ns/op"}, over: reading{"B", "ns/op"}, scale: 2}
	if v, ok := a.value(m); !ok || v != 25.0/3 {
		t.Errorf("value = %v %v, want %v", v, ok, 25.0/3)
	}
}

// Every aim names a benchmark that is there, or it would be left out unseen.
func TestAimsHaveBenchmarks(t *testing.T) {
	if err := toRoot(); err != nil {
		t.Fatal(err)
	}
	var all strings.Builder
	files, err := filepath.Glob("*/*/*_test.go")
	if err != nil {
		t.Fatal(err)
	}
	more, _ := filepath.Glob("*/*_test.go")
	for _, f := range append(files, more...) {
		text, err := os.ReadFile(f)
		if err != nil {
			t.Fatal(err)
		}
		all.Write(text)
	}
	for _, a := range aims {
		for _, r := range []reading{a.of, a.over} {
			name, _, _ := strings.Cut(r.bench, "/")
			if r.bench != "" && !strings.Contains(all.String(), "func Benchmark"+name+"(") {
				t.Errorf("%s: there is no Benchmark%s", a.what, name)
			}
		}
	}
}

func TestFresh(t *testing.T) {
	dir := t.TempDir()
	at := func(name string, minutes int) string {
		path := filepath.Join(dir, name)
		if err := os.MkdirAll(filepath.Dir(path), 0o755); err != nil {
			t.Fatal(err)
		}
		if _, err := os.Stat(path); err != nil {
			if err := os.WriteFile(path, nil, 0o644); err != nil {
				t.Fatal(err)
			}
		}
		when := time.Date(2026, 7, 1, 12, minutes, 0, 0, time.UTC)
		for _, p := range []string{path, filepath.Dir(path)} {
			if err := os.Chtimes(p, when, when); err != nil {
				t.Fatal(err)
			}
		}
		return path
	}
	at("src/a.go", 1)
	target, src := at("out/program", 5), filepath.Join(dir, "src")
	if !fresh(target, src) {
		t.Error("a target younger than its source is not fresh")
	}
	at("src/a_test.go", 9)
	at("src/a.go", 1) // the folder is as old as before
	if !fresh(target, src) {
		t.Error("a test that changed makes the program old")
	}
	at("src/a.go", 6)
	if fresh(target, src) {
		t.Error("a target older than its source is fresh")
	}
	if fresh(filepath.Join(dir, "none"), src) {
		t.Error("a target that is not there is fresh")
	}
}
