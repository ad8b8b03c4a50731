package store

import (
	"errors"
	"fmt"
	"io"
	"os"
	"path/filepath"
	"time"
)

// FS is the layer below the journals, and below every renaming of a file. The
// system's own unless a test puts a faulty one here; bbolt opens its files
// itself.
type FS interface {
	// Append opens a file for appending, and makes it when it is not there.
	Append(path string) (File, error)
	// Create makes a file, or empties it.
	Create(path string) (File, error)
	Rename(from, to string) error
	Remove(path string) error
	// SyncDir flushes a folder, so that a name made or changed in it stays.
	SyncDir(dir string) error
}

// File is a file of an [FS], open for writing.
type File interface {
	io.Writer
	Sync() error
	Close() error
}

// osFS is the system's own.
type osFS struct{}

func (osFS) Append(path string) (File, error) {
	return os.OpenFile(path, os.O_CREATE|os.O_APPEND|os.O_WRONLY, 0o600)
}

func (osFS) Create(path string) (File, error) {
	return os.OpenFile(path, os.O_CREATE|os.O_TRUNC|os.O_WRONLY, 0o600)
}

func (osFS) Rename(from, to string) error { return os.Rename(from, to) }
func (osFS) Remove(path string) error     { return os.Remove(path) }

func (osFS) SyncDir(dir string) error {
	d, err := os.Open(dir)
	if err != nil {
		return err
	}
	return errors.Join(d.Sync(), d.Close())
}

func syncDir(fs FS, dir string) error {
	if err := fs.SyncDir(dir); err != nil {
		return fmt.Errorf("flush folder %s: %w", dir, err)
	}
	return nil
}

// move renames a file for good.
func move(fs FS, from, to string) error {
	if err := fs.Rename(from, to); err != nil {
		return fmt.Errorf("rename %s: %w", from, err)
	}
	return syncDir(fs, filepath.Dir(to))
}

// setAside renames a file that cannot be used, so that nothing of it is lost.
// why is part of the new name: "bad", "failed", "foreign".
func setAside(fs FS, path, why string, now time.Time) (string, error) {
	to := fmt.Sprintf("%s.%s-%s", path, why, now.UTC().Format("20060102T150405.000"))
	for exists(to) {
		to += "+"
	}
	if err := move(fs, path, to); err != nil {
		return "", fmt.Errorf("set aside: %w", err)
	}
	return to, nil
}

// staged ends the name of a file that is not whole yet.
const staged = ".new"

// stage writes a whole file under the name that it is moved from when it is
// on the medium.
func stage(fs FS, path string, data []byte) error {
	f, err := fs.Create(path + staged)
	if err != nil {
		return fmt.Errorf("write %s: %w", path, err)
	}
	n, err := f.Write(data)
	if err == nil && n < len(data) {
		err = io.ErrShortWrite
	}
	if err != nil {
		return fmt.Errorf("write %s: %w", path, errors.Join(err, f.Close()))
	}
	if err := errors.Join(f.Sync(), f.Close()); err != nil {
		return fmt.Errorf("write %s: %w", path, err)
	}
	return nil
}

// writeFile writes a whole file so that it is there whole or not at all.
func writeFile(fs FS, path string, data []byte) error {
	if err := stage(fs, path, data); err != nil {
		return err
	}
	return move(fs, path+staged, path)
}

func exists(path string) bool {
	_, err := os.Lstat(path)
	return err == nil
}

func removeIf(fs FS, path string) error {
	if err := fs.Remove(path); err != nil && !errors.Is(err, os.ErrNotExist) {
		return err
	}
	return nil
}
