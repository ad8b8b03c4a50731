// Package pwa carries the page that the phones open: what Vite built from the
// TypeScript in src, embedded so that the program is one file.
//
// A tree in which the page was never built holds only a placeholder, and
// [Built] says so: the program then serves its API without a page.
package pwa

import (
	"embed"
	"io/fs"
)

//go:embed all:dist
var dist embed.FS

// FS is the page's root: index.html, sw.js, the engine and the assets, with a
// gzipped copy (name + ".gz") beside each file that gains from it.
var FS fs.FS = sub()

func sub() fs.FS {
	root, err := fs.Sub(dist, "dist")
	if err != nil {
		panic("pwa: dist is not a valid path: " + err.Error()) // the name is a constant
	}
	return root
}

// Built reports whether the page was built into this program.
func Built() bool {
	_, err := fs.Stat(FS, "index.html")
	return err == nil
}
