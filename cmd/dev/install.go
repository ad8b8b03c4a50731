package main

import (
	"context"
	"fmt"
	"os"
	"slices"
	"strings"
)

// tool is a program that tests use, with the Debian package it is in. Tests that
// lack theirs say so and are left out.
type tool struct {
	name, pkg, use string
}

var tools = []tool{
	{"chromium", "chromium", "the page in a real browser"},
	{"GeodSolve", "geographiclib-tools", "geodesics against another program"},
	{"socat", "socat", "a real pair of serial ports"},
	{"xmllint", "libxml2-utils", "exports against their schemas"},
	{"strace", "strace", "faults in system calls"},
	{"gcc", "gcc libc6-dev", "the race detector, drift against plain C"},
}

// install brings what is missing where it may: as root on Debian. Elsewhere
// it says in a line what is missing.
func install(ctx context.Context, opt options) error {
	missing := lacking()
	if len(missing) > 0 && os.Getuid() == 0 && have("apt-get") {
		fmt.Println("installing what the tests need:", names(missing))
		env := "DEBIAN_FRONTEND=noninteractive"
		var pkgs []string
		for _, t := range missing {
			pkgs = append(pkgs, strings.Fields(t.pkg)...)
		}
		// A failed update need not matter: what is in the lists may do.
		if err := cmd("apt-get", "update", "-qq").with(env).run(ctx); err != nil {
			fmt.Println(err)
		}
		if err := cmd("apt-get", append([]string{"install", "-y", "-qq", "--no-install-recommends"}, pkgs...)...).with(env).run(ctx); err != nil {
			fmt.Println(err)
		}
		missing = lacking()
	}
	if len(missing) == 0 {
		return nil
	}
	err := fmt.Errorf("missing: %s; on Debian: apt-get install %s", names(missing), debian(missing))
	if opt.strict || slices.ContainsFunc(missing, func(t tool) bool { return t.name == "gcc" && !opt.fast }) {
		return err
	}
	return fmt.Errorf("%w: %w", errSkipped, err)
}

// names says in words what is missing, and for what.
func names(tools []tool) string {
	var out []string
	for _, t := range tools {
		out = append(out, t.name+" (for "+t.use+")")
	}
	return strings.Join(out, ", ")
}

func debian(tools []tool) string {
	var out []string
	for _, t := range tools {
		out = append(out, t.pkg)
	}
	return strings.Join(out, " ")
}

func lacking() []tool {
	var out []tool
	for _, t := range tools {
		if !have(t.name) {
			out = append(out, t)
		}
	}
	return out
}
