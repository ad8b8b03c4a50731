package store

import (
	"io"
	"os"
	"path/filepath"
	"slices"
	"sync"
	"syscall"
	"testing"
)

// faultFS is a disk that fails its n-th call and goes on, and that loses at
// crash what was not flushed: the bytes of files, and with undo the names of
// files.
type faultFS struct {
	mu    sync.Mutex
	at    int // the call that fails; 0 is none
	how   string
	calls int
	hit   string // the call that failed

	sizes   map[string]*medium
	renames [][2]string // not yet flushed
}

// medium is a file: how much of it is written, and how much is safe.
type medium struct {
	path             string
	written, flushed int64
}

func newFaultFS(at int, how string) *faultFS {
	return &faultFS{at: at, how: how, sizes: make(map[string]*medium)}
}

// due counts a call and says whether it is the one that fails.
func (f *faultFS) due(call string) bool {
	f.mu.Lock()
	defer f.mu.Unlock()
	f.calls++
	if f.calls != f.at {
		return false
	}
	f.hit = call
	return true
}

func (f *faultFS) err() error {
	if f.how == "full" {
		return syscall.ENOSPC
	}
	return syscall.EIO
}

func (f *faultFS) open(path string, flag int) (File, error) {
	if f.due("open " + filepath.Base(path)) {
		return nil, f.err()
	}
	file, err := os.OpenFile(path, flag, 0o600)
	if err != nil {
		return nil, err
	}
	size, err := file.Seek(0, io.SeekEnd)
	if err != nil {
		return nil, err
	}
	f.mu.Lock()
	defer f.mu.Unlock()
	m := f.sizes[path]
	if m == nil || flag&os.O_TRUNC != 0 {
		m = &medium{path, size, size}
		f.sizes[path] = m
	}
	return &faultFile{f, file, m}, nil
}

func (f *faultFS) Append(path string) (File, error) {
	return f.open(path, os.O_CREATE|os.O_APPEND|os.O_RDWR)
}

func (f *faultFS) Create(path string) (File, error) {
	return f.open(path, os.O_CREATE|os.O_TRUNC|os.O_RDWR)
}

func (f *faultFS) Rename(from, to string) error {
	if f.due("rename " + filepath.Base(from)) {
		return f.err()
	}
	f.mu.Lock()
	defer f.mu.Unlock()
	if m := f.sizes[from]; m != nil {
		delete(f.sizes, from)
		m.path, f.sizes[to] = to, m
	}
	f.renames = append(f.renames, [2]string{from, to})
	return os.Rename(from, to)
}

func (f *faultFS) Remove(path string) error {
	if f.due("remove " + filepath.Base(path)) {
		return f.err()
	}
	return os.Remove(path)
}

func (f *faultFS) SyncDir(dir string) error {
	if f.due("flush of a folder") {
		return f.err()
	}
	f.mu.Lock()
	defer f.mu.Unlock()
	f.renames = nil
	return nil
}

type faultFile struct {
	fs *faultFS
	f  *os.File
	m  *medium
}

func (j *faultFile) Write(p []byte) (int, error) {
	due := j.fs.due("write to " + filepath.Base(j.m.path))
	j.fs.mu.Lock()
	defer j.fs.mu.Unlock()
	if !due {
		n, err := j.f.Write(p)
		j.m.written += int64(n)
		return n, err
	}
	if j.fs.how != "short" && j.fs.how != "torn" {
		return 0, j.fs.err()
	}
	n, _ := j.f.Write(p[:len(p)/2])
	j.m.written += int64(n)
	if j.fs.how == "short" {
		return n, nil // against the rules of io.Writer; a store that trusts it loses data
	}
	return n, syscall.EIO
}

func (j *faultFile) Sync() error {
	due := j.fs.due("flush of " + filepath.Base(j.m.path))
	j.fs.mu.Lock()
	defer j.fs.mu.Unlock()
	switch {
	case due && j.fs.how == "lie":
		return nil
	case due:
		// As Linux does it: told once, and the pages then count as clean.
		return j.fs.err()
	}
	j.m.flushed = j.m.written
	return nil
}

func (j *faultFile) Close() error { return j.f.Close() }

// crash leaves what is on the medium. Names that were not flushed are taken
// back with undo: both may be found after a power cut.
func (f *faultFS) crash(t *testing.T, undo bool) {
	t.Helper()
	f.mu.Lock()
	defer f.mu.Unlock()
	for _, m := range f.sizes {
		if err := os.Truncate(m.path, m.flushed); err != nil && !os.IsNotExist(err) {
			t.Fatal(err)
		}
	}
	if !undo {
		return
	}
	for _, r := range slices.Backward(f.renames) {
		if exists(r[1]) && !exists(r[0]) {
			if err := os.Rename(r[1], r[0]); err != nil {
				t.Fatal(err)
			}
		}
	}
}
