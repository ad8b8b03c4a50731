//go:build !js

package main

import (
	"fmt"
	"os"
)

func main() {
	fmt.Fprintln(os.Stderr, "engine is built for the page: GOOS=js GOARCH=wasm go build ./cmd/engine")
	os.Exit(2)
}
