package main

import (
	"os"

	"wakeback/server/store"
)

func main() {
	store.CheckMain() // a process started to check a file ends here
	os.Exit(run(os.Args[1:], os.Stdout, os.Stderr))
}
