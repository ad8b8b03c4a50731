package main

import (
	"context"
	"errors"
	"fmt"
	"os"
	"path/filepath"
)

func checkFormat(ctx context.Context, _ options) error {
	out, err := cmd("gofmt", "-l", "cmd", "drift", "search", "server", "pwa/pwa.go").output(ctx)
	if err != nil {
		return err
	}
	if out != "" {
		return fmt.Errorf("gofmt would change:\n%s", out)
	}
	return nil
}

func vet(ctx context.Context, _ options) error {
	if err := cmd("go", "vet", "./...").run(ctx); err != nil {
		return err
	}
	return cmd("go", "tool", "staticcheck", "./...").run(ctx)
}

// checkEngine builds every package of the engine for the page, those too that
// the page does not use yet.
func checkEngine(ctx context.Context, _ options) error {
	js := []string{"GOOS=js", "GOARCH=wasm"}
	if err := cmd("go", "build", "./drift/...", "./search/...").with(js...).run(ctx); err != nil {
		return err
	}
	return buildEngine(ctx)
}

func checkPage(ctx context.Context, _ options) error {
	if err := packages(ctx); err != nil {
		return err
	}
	if err := cmd("npm", "run", "--silent", "check").in("pwa").run(ctx); err != nil {
		return err
	}
	return cmd("npm", "test", "--silent").in("pwa").run(ctx)
}

// goTests runs everything beside the code. The engine has no goroutines, which
// a test of the floors sees to, so that the race detector has nothing to find
// there and would only cost minutes. The limit is for a test that hangs.
func goTests(ctx context.Context, opt options) error {
	race := []string{"-race"}
	if opt.fast {
		race = nil
	}
	return errors.Join(
		goTest(ctx, nil, "./drift/...", "./search/...", "./cmd/engine"),
		goTest(ctx, race, "./server/...", "./cmd/dev", "./cmd/wakeback"),
	)
}

func goTest(ctx context.Context, flags []string, pkgs ...string) error {
	args := append([]string{"test", "-timeout", "6m"}, flags...)
	// With the race detector every process sleeps a second as it ends, and tests
	// start hundreds of them.
	c := cmd("go", append(args, pkgs...)...).with("GORACE=atexit_sleep_ms=20")
	err := c.run(ctx)
	if err == nil || ctx.Err() != nil {
		return err
	}
	// Sockets and killed processes on a busy machine can miss a deadline. What
	// failed runs once more, what passed is cached, and the run says so. A
	// property that failed keeps its case and fails again.
	fmt.Println("once more, for what failed:", err)
	return c.run(ctx)
}

// browser runs the page's stories against a stand-in and against the program.
func browser(ctx context.Context, opt options) error {
	if !have("chromium") && !opt.strict {
		return fmt.Errorf("%w: no chromium on this machine (Debian package chromium)", errSkipped)
	}
	if err := build(ctx); err != nil {
		return err
	}
	root, err := os.Getwd()
	if err != nil {
		return fmt.Errorf("find the program: %w", err)
	}
	return cmd("npm", "run", "--silent", "e2e").in("pwa").with("WAKEBACK=" + filepath.Join(root, programBin)).run(ctx)
}
