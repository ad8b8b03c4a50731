package main

import (
	"context"
	"fmt"
	"io"
	"io/fs"
	"os"
	"path/filepath"
	"strings"
	"time"
)

const (
	engineFile = "pwa/public/engine.wasm"
	glueFile   = "pwa/public/wasm_exec.js"
	programBin = "bin/wakeback"
)

// build makes what is older than its sources: the engine, the page, the program.
func build(ctx context.Context) error {
	for _, step := range []func(context.Context) error{buildEngine, buildPage, buildProgram} {
		if err := step(ctx); err != nil {
			return err
		}
	}
	return nil
}

// buildEngine compiles the engine for the page. The standard library is
// compiled without inlining, which makes the engine a twentieth smaller and
// its own arithmetic no slower.
func buildEngine(ctx context.Context) error {
	if fresh(engineFile, "drift", "search", "cmd/engine", "go.mod") && fresh(glueFile, "go.mod") {
		return nil
	}
	fmt.Println("== engine")
	c := cmd("go", "build", "-trimpath", "-ldflags=-s -w", "-gcflags=all=-l", "-gcflags=wakeback/...=", "-o", engineFile, "./cmd/engine").
		with("GOOS=js", "GOARCH=wasm")
	if err := c.run(ctx); err != nil {
		return err
	}
	root, err := cmd("go", "env", "GOROOT").output(ctx)
	if err != nil {
		return err
	}
	return copyFile(filepath.Join(strings.TrimSpace(root), "lib", "wasm", "wasm_exec.js"), glueFile)
}

// packages installs what the page is built with, when the lock has changed.
func packages(ctx context.Context) error {
	if !have("npm") {
		return fmt.Errorf("npm is missing: install Node 20 with npm")
	}
	if fresh("pwa/node_modules/.package-lock.json", "pwa/package-lock.json") {
		return nil
	}
	fmt.Println("== npm ci")
	return cmd("npm", "ci", "--no-audit", "--no-fund").in("pwa").run(ctx)
}

var pageSources = []string{
	"pwa/src", "pwa/public", "pwa/script/finish.mjs", "pwa/index.html", "pwa/package-lock.json", "pwa/vite.config.ts", "pwa/tsconfig.json",
}

func buildPage(ctx context.Context) error {
	// The last step of the page's build touches the second of these.
	if fresh("pwa/dist/index.html", pageSources...) && fresh("pwa/dist/.keep", pageSources...) {
		return nil
	}
	if err := packages(ctx); err != nil {
		return err
	}
	fmt.Println("== page")
	return cmd("npm", "run", "--silent", "build").in("pwa").run(ctx)
}

func buildProgram(ctx context.Context) error {
	if fresh(programBin, "drift", "search", "server", "cmd/wakeback", "pwa/pwa.go", "pwa/dist", "go.mod", "go.sum") {
		return nil
	}
	fmt.Println("== program")
	return cmd("go", "build", "-trimpath", "-ldflags=-s -w", "-o", programBin, "./cmd/wakeback").with("CGO_ENABLED=0").run(ctx)
}

// fresh reports whether a file is there and no older than any of its sources,
// which are files and folders. Tests do not count.
func fresh(target string, sources ...string) bool {
	made, err := os.Stat(target)
	if err != nil {
		return false
	}
	for _, source := range sources {
		if newest(source).After(made.ModTime()) {
			return false
		}
	}
	return true
}

// newest is when the youngest file or folder of a tree was changed: what was
// removed changes the folder.
func newest(root string) time.Time {
	var at time.Time
	_ = filepath.WalkDir(root, func(path string, d fs.DirEntry, err error) error {
		if err != nil || strings.HasSuffix(path, "_test.go") || strings.Contains(path, ".test.ts") {
			return nil
		}
		if d.IsDir() && (d.Name() == "node_modules" || d.Name() == "testdata") {
			return fs.SkipDir
		}
		if info, err := d.Info(); err == nil && info.ModTime().After(at) {
			at = info.ModTime()
		}
		return nil
	})
	return at
}

func copyFile(from, to string) error {
	in, err := os.Open(from)
	if err != nil {
		return err
	}
	defer in.Close()
	out, err := os.Create(to)
	if err != nil {
		return err
	}
	if _, err := io.Copy(out, in); err != nil {
		_ = out.Close()
		return fmt.Errorf("copy %s to %s: %w", from, to, err)
	}
	return out.Close()
}
