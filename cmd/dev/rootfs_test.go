package main

import (
	"io/fs"
	"os"
)

// rootFS is the tree, from the folder of go.mod.
type rootFS struct{}

func (rootFS) Open(name string) (fs.File, error) { return os.Open(name) }
