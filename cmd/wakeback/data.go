package main

import (
	"errors"
	"fmt"
	"os"
	"path/filepath"
)

// dataDir is the folder of the store: the one named, or the user's own place
// for such things.
func dataDir(named string) (string, error) {
	if named != "" {
		return named, nil
	}
	base, err := os.UserConfigDir()
	if err != nil {
		return "", badInput("--data", fmt.Errorf("this machine has no usual folder for data, name one: %w", err))
	}
	return filepath.Join(base, "wakeback"), nil
}

// invented is the file that marks a folder of the demonstration, so that what
// never happened is not taken for what did.
const invented = "INVENTED"

// demoDir prepares a folder for the demonstration. It returns what removes it,
// when it was made for this run only.
func demoDir(named string) (dir string, remove func(), err error) {
	remove = func() {}
	if named == "" {
		if named, err = os.MkdirTemp("", "wakeback-demo-"); err != nil {
			return "", nil, fmt.Errorf("make a folder for the demonstration: %w", err)
		}
		dir := named
		remove = func() { _ = os.RemoveAll(dir) }
	}
	if err := os.MkdirAll(named, 0o700); err != nil {
		return "", nil, fmt.Errorf("make the folder %s: %w", named, err)
	}
	if exists(filepath.Join(named, "wakeback.db")) && !exists(filepath.Join(named, invented)) {
		return "", nil, badInput("--demo", fmt.Errorf("the folder %s holds a log of real voyages; name another with --data, or none", named))
	}
	text := []byte("The vessel and the incidents in this folder were invented by wakeback serve --demo.\n")
	if err := os.WriteFile(filepath.Join(named, invented), text, 0o600); err != nil {
		return "", nil, fmt.Errorf("mark the folder of the demonstration: %w", err)
	}
	return named, remove, nil
}

func exists(path string) bool {
	_, err := os.Stat(path)
	return !errors.Is(err, os.ErrNotExist)
}
