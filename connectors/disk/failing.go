package disk

import (
	"io/fs"
	"path/filepath"
)

// Failing lets one call of a file system fail, or all calls from one on; it tells which it was.
type Failing struct {
	FS    FS
	Err   error  // what the failing call returns
	At    int    // number of the call that fails, from 0
	Call  string // only calls of this name count and fail; empty: all
	Stays bool   // later writes and creates fail too, as on a full disk

	calls int
	name  string
	path  string
}

// Fired tells whether the call was reached, its name, and the path it concerned.
func (f *Failing) Fired() (name, path string, fired bool) { return f.name, f.path, f.calls > f.At }

// fail counts a call and tells whether it is to fail.
func (f *Failing) fail(name, path string) error {
	if f.Call != "" && f.Call != name {
		return nil
	}
	n := f.calls
	f.calls++
	if n == f.At {
		f.name, f.path = name, filepath.Clean(path)
		return f.Err
	}
	if n > f.At && f.Stays && (name == "write" || name == "create" || name == "sync") {
		return f.Err
	}
	return nil
}

// Create implements FS.
func (f *Failing) Create(path string) (File, error) {
	if err := f.fail("create", path); err != nil {
		return nil, err
	}
	file, err := f.FS.Create(path)
	if err != nil {
		return nil, err
	}
	return &failingFile{file, f, path}, nil
}

// Rename implements FS.
func (f *Failing) Rename(from, to string) error {
	if err := f.fail("rename", to); err != nil {
		return err
	}
	return f.FS.Rename(from, to)
}

// Remove implements FS.
func (f *Failing) Remove(path string) error {
	if err := f.fail("remove", path); err != nil {
		return err
	}
	return f.FS.Remove(path)
}

// Stat implements FS.
func (f *Failing) Stat(path string) (fs.FileInfo, error) {
	if err := f.fail("stat", path); err != nil {
		return nil, err
	}
	return f.FS.Stat(path)
}

// SyncDir implements FS.
func (f *Failing) SyncDir(dir string) error {
	if err := f.fail("syncdir", dir); err != nil {
		return err
	}
	return f.FS.SyncDir(dir)
}

type failingFile struct {
	File
	f    *Failing
	path string
}

// Write implements File; a failing write writes half of its bytes first.
func (w *failingFile) Write(b []byte) (int, error) {
	if err := w.f.fail("write", w.path); err != nil {
		n, _ := w.File.Write(b[:len(b)/2])
		return n, err
	}
	return w.File.Write(b)
}

// Sync implements File.
func (w *failingFile) Sync() error {
	if err := w.f.fail("sync", w.path); err != nil {
		return err
	}
	return w.File.Sync()
}

// Close implements File; a failing close closes.
func (w *failingFile) Close() error {
	err := w.f.fail("close", w.path)
	if e := w.File.Close(); err == nil {
		err = e
	}
	return err
}
