package main

import (
	"context"
	"fmt"
	"os"
	"strings"
)

// tool is a program that tests need, with the Debian package it is in.
type tool struct {
	name, pkg, use string
	must           bool // no test run passes without it
}

var tools = []tool{
	{"chromium", "chromium", "the page's stories in a real browser", true},
	{"GeodSolve", "geographiclib-tools", "geodesics checked against another program", true},
	{"socat", "socat", "a real pair of serial ports", true},
	{"xmllint", "libxml2-utils", "exports checked against their schemas", false},
	{"strace", "strace", "faults injected into system calls", false},
	{"gcc", "gcc", "the race detector", true},
}

// install brings what is missing where it may: as root on Debian. Elsewhere
// it says in a line what is missing.
func install(ctx context.Context) error {
	missing := lacking()
	if len(missing) == 0 {
		return nil
	}
	if os.Getuid() == 0 && have("apt-get") {
		var pkgs []string
		for _, t := range missing {
			pkgs = append(pkgs, t.pkg)
		}
		fmt.Println("installing", strings.Join(pkgs, " "))
		env := "DEBIAN_FRONTEND=noninteractive"
		if err := cmd("apt-get", "update", "-qq").with(env).run(ctx); err != nil {
			fmt.Println(err)
		}
		if err := cmd("apt-get", append([]string{"install", "-y", "-qq", "--no-install-recommends"}, pkgs...)...).with(env).run(ctx); err != nil {
			fmt.Println(err)
		}
		missing = lacking()
	}
	fatal := false
	for _, t := range missing {
		fmt.Printf("missing: %s (Debian package %s), for %s\n", t.name, t.pkg, t.use)
		fatal = fatal || t.must
	}
	if fatal {
		return fmt.Errorf("install what is missing and run the tests again")
	}
	return nil
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
