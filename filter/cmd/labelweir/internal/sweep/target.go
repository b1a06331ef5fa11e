package sweep

import (
	"errors"
	"fmt"
	"io"
	"io/fs"
	"os"
	"path/filepath"

	"labelweir/connectors/table"
)

// target is a small output file. It is written beside its final place, so that no half file ever stands there.
type target struct {
	path    string // final place
	replace bool   // whether a file that stands there may go
	file    *os.File
	done    bool
}

// openTarget makes sure that path can be written and is free, long before there is anything to write; path "" gives
// nil, on which every method does nothing. Errors wrap table.ErrTarget.
func openTarget(path string, replace bool) (*target, error) {
	if path == "" {
		return nil, nil
	}
	t := &target{path: path, replace: replace}
	if err := t.free(); err != nil {
		return nil, err
	}
	for n := 0; ; n++ {
		part := filepath.Join(filepath.Dir(path), fmt.Sprintf(".%s.part-%d-%d", filepath.Base(path), os.Getpid(), n))
		file, err := os.OpenFile(part, os.O_WRONLY|os.O_CREATE|os.O_EXCL, 0o666)
		if err == nil {
			t.file = file
			return t, nil
		}
		if !errors.Is(err, fs.ErrExist) || n == 100 {
			return nil, t.cannot(err)
		}
	}
}

// free refuses a path where something stands that may not be replaced, or that is no plain file.
func (t *target) free() error {
	info, err := os.Lstat(t.path)
	switch {
	case errors.Is(err, fs.ErrNotExist):
		return nil
	case err != nil:
		return t.cannot(err)
	case !info.Mode().IsRegular():
		return &table.Error{Path: t.path, What: "is no plain file", Do: "name another file", Kind: table.ErrTarget}
	case !t.replace:
		return &table.Error{Path: t.path, What: "exists", Do: "name another file, or give --replace",
			Kind: table.ErrTarget}
	}
	return nil
}

func (t *target) cannot(err error) error {
	do := "name a folder that is there and can be written to"
	var p *fs.PathError
	if errors.As(err, &p) {
		err = p.Err // the path of the part file says nothing to the user
	}
	return &table.Error{Path: t.path, What: "can't be created", Do: do, Kind: table.ErrTarget, Err: err}
}

// commit writes the content, makes sure that it is on disk, and gives the file its name. Errors wrap
// table.ErrWrite or ErrTarget.
func (t *target) commit(write func(io.Writer) error) error {
	if t == nil {
		return nil
	}
	err := write(t.file)
	if err == nil {
		err = t.file.Sync()
	}
	if closed := t.file.Close(); err == nil {
		err = closed
	}
	if err != nil {
		var p *fs.PathError
		if errors.As(err, &p) {
			err = p.Err
		}
		return &table.Error{Path: t.path, What: "can't be written", Do: "make room, or name a file elsewhere",
			Kind: table.ErrWrite, Err: err}
	}
	if err := t.free(); err != nil {
		return err
	}
	if err := os.Rename(t.file.Name(), t.path); err != nil {
		return t.cannot(err)
	}
	t.done = true
	return syncFolder(filepath.Dir(t.path))
}

// syncFolder makes sure that a new name in the folder is on disk.
func syncFolder(path string) error {
	d, err := os.Open(path)
	if err != nil {
		return fmt.Errorf("%s: %w", path, err)
	}
	return errors.Join(d.Sync(), d.Close())
}

// close removes what was not committed.
func (t *target) close() {
	if t != nil && !t.done {
		t.file.Close()
		os.Remove(t.file.Name())
	}
}
