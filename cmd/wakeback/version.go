package main

import (
	"fmt"
	"runtime/debug"
)

type versionCmd struct {
	JSON bool `name:"json" help:"Print one JSON document."`
}

// Run prints the version.
func (c *versionCmd) Run(e *env) error {
	if c.JSON {
		return e.printJSON(map[string]string{"version": versionText()})
	}
	_, err := fmt.Fprintln(e.out, versionText())
	return err
}

// versionText is what the Go tool wrote into the program: the commit, where it was
// built from a checkout.
func versionText() string {
	info, ok := debug.ReadBuildInfo()
	if !ok {
		return "unknown"
	}
	set := make(map[string]string)
	for _, s := range info.Settings {
		set[s.Key] = s.Value
	}
	commit := set["vcs.revision"]
	if len(commit) < 12 {
		return "development"
	}
	v := commit[:12]
	if set["vcs.modified"] == "true" {
		v += "+changes"
	}
	return v
}
