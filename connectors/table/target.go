package table

import (
	"bufio"
	"errors"
	"fmt"
	"io"
	"io/fs"
	"os"
	"path/filepath"
	"syscall"

	"labelweir/connectors/disk"
)

// OutputPaths are the files that a Sink writes.
type OutputPaths struct {
	Tagged     string // every record that is not held back
	Quarantine string // records held back; empty: none may be
}

// Target is a file to be: written under a temporary name beside the final one, which it gets when it is whole. The nil
// Target is a file not wanted: it takes what it is told and does nothing.
type Target struct {
	disk    disk.FS
	path    string // the final name
	temp    string
	file    disk.File
	replace bool
	existed bool
	open    bool // file is open
	placed  bool // the final name is taken
	kept    bool // it stays there
	pipe    bool // bytes go on at once: there is no name to take
}

// Pipe is the path that stands for standard output.
const Pipe = "-"

// openTarget begins the output of a path.
func openTarget(d disk.FS, path string, opt Options) (*Target, error) {
	if path != Pipe {
		return newTarget(d, path, opt.Replace)
	}
	if opt.Pipe == nil {
		return nil, &Error{Path: path, What: "there is no pipe to write into", Do: "name a file", Kind: ErrTarget}
	}
	return &Target{disk: d, path: "standard output", file: pipeFile{opt.Pipe}, pipe: true}, nil
}

// pipeFile is a pipe as a file being written.
type pipeFile struct{ io.Writer }

func (pipeFile) Sync() error  { return nil }
func (pipeFile) Close() error { return nil }

// NewTarget checks path and creates the temporary file, on opt.Disk; path "" gives nil. Errors wrap ErrTarget.
func NewTarget(path string, opt Options) (*Target, error) {
	if path == "" {
		return nil, nil
	}
	opt = opt.filled()
	return newTarget(opt.Disk, path, opt.Replace)
}

func newTarget(d disk.FS, path string, replace bool) (*Target, error) {
	t := &Target{disk: d, path: path, replace: replace}
	dir := filepath.Dir(path)
	info, err := d.Stat(dir)
	switch {
	case errors.Is(err, fs.ErrNotExist):
		return nil, &Error{Path: path, What: fmt.Sprintf("its folder %s does not exist", dir), Do: "create the folder first", Kind: ErrTarget}
	case err != nil:
		return nil, t.fault("its folder can't be looked at", ErrTarget, err)
	case !info.IsDir():
		return nil, &Error{Path: path, What: fmt.Sprintf("%s is not a folder", dir), Do: "check the path", Kind: ErrTarget}
	}
	if err := t.free(); err != nil {
		return nil, err
	}
	for n := 0; ; n++ {
		t.temp = partName(path, os.Getpid(), n)
		if t.file, err = d.Create(t.temp); err == nil {
			t.open = true
			return t, nil
		}
		if !errors.Is(err, fs.ErrExist) || n == 100 {
			return nil, t.fault("can't be created", ErrTarget, err)
		}
	}
}

// free tells whether the final name may be taken.
func (t *Target) free() error {
	info, err := t.disk.Stat(t.path)
	switch {
	case errors.Is(err, fs.ErrNotExist):
		t.existed = false
		return nil
	case err != nil:
		return t.fault("can't be looked at", ErrTarget, err)
	case !info.Mode().IsRegular():
		return &Error{Path: t.path, What: "exists and is not a regular file", Do: "name another output", Kind: ErrTarget}
	case !t.replace:
		return &Error{Path: t.path, What: "exists", Do: "name another output or allow it to be replaced", Kind: ErrTarget, Err: quiet{fs.ErrExist}}
	}
	t.existed = true
	return nil
}

// sync brings the bytes to the disk and closes the file.
func (t *Target) sync() error {
	err := t.file.Sync()
	t.open = false
	if e := t.file.Close(); err == nil {
		err = e
	}
	return err
}

// place gives the file its final name.
func (t *Target) place() error {
	if t.pipe {
		return nil
	}
	if err := t.free(); err != nil { // it may have come to be meanwhile
		return err
	}
	if err := t.disk.Rename(t.temp, t.path); err != nil {
		return t.fault("can't be given its name", ErrWrite, err)
	}
	t.placed = true
	return nil
}

// Write implements io.Writer, for content that comes before Fill; errors wrap ErrWrite.
func (t *Target) Write(b []byte) (int, error) {
	n, err := t.file.Write(b)
	if err != nil {
		err = t.fault("can't be written", ErrWrite, err)
	}
	return n, err
}

// Fill writes the whole content through write, and brings it to the disk. Errors wrap ErrWrite.
func (t *Target) Fill(write func(io.Writer) error) error {
	if t == nil {
		return nil
	}
	buf := bufio.NewWriterSize(t.file, 1<<16)
	err := write(buf)
	if err == nil {
		err = buf.Flush()
	}
	if err == nil {
		err = t.sync()
	}
	if err != nil {
		return t.fault("can't be written", ErrWrite, err)
	}
	return nil
}

// Drop removes what there is: the temporary file, or the final one when it replaced nothing. After the commit of the
// sink that it was committed with, it does nothing.
func (t *Target) Drop() error {
	if t == nil || t.kept || t.pipe {
		return nil
	}
	if t.open {
		t.open = false
		_ = t.file.Close() // what it holds goes anyway
	}
	name := t.temp
	switch {
	case t.placed && t.existed:
		return nil // the file before it is gone, so the whole new one stays
	case t.placed:
		name = t.path
	}
	if err := t.disk.Remove(name); err != nil && !errors.Is(err, fs.ErrNotExist) {
		return t.fault(fmt.Sprintf("the unfinished file %s can't be removed", name), ErrWrite, err)
	}
	return nil
}

// fault is an error about this target, with advice for the causes that can be told apart.
func (t *Target) fault(what string, kind, err error) error {
	var own *Error
	if errors.As(err, &own) {
		if own.Path == "" { // writers know no names
			named := *own
			named.Path = t.path
			return &named
		}
		return err
	}
	e := &Error{Path: t.path, What: what, Kind: kind, Err: bare(err)}
	switch {
	case errors.Is(err, syscall.ENOSPC):
		e.Do = "the disk is full: make room or write elsewhere"
	case errors.Is(err, syscall.EDQUOT):
		e.Do = "the quota is used up: make room or write elsewhere"
	case errors.Is(err, syscall.EFBIG):
		e.Do = "the largest file size is reached: raise the limit or write elsewhere"
	case errors.Is(err, fs.ErrNotExist):
		e.Do = "its folder was removed or moved meanwhile: run again into one that stays"
	case errors.Is(err, fs.ErrPermission):
		e.Do = "check the permissions of its folder"
	case errors.Is(err, syscall.EROFS):
		e.Do = "the file system is read-only: write elsewhere"
	}
	return e
}

// bare takes the temporary name and the system call off an error.
func bare(err error) error {
	if pe := (*fs.PathError)(nil); errors.As(err, &pe) {
		return pe.Err
	}
	if le := (*os.LinkError)(nil); errors.As(err, &le) {
		return le.Err
	}
	return err
}

// distinct tells whether input and outputs are different files, links resolved.
func distinct(d disk.FS, inputs []Input, out OutputPaths) error {
	if out.Quarantine == Pipe {
		return &Error{Path: Pipe, What: "only tagged records can go into a pipe", Do: "name a file for the quarantine", Kind: ErrTarget}
	}
	if out.Quarantine != "" && out.Tagged != Pipe && resolved(out.Tagged) == resolved(out.Quarantine) {
		return &Error{Path: out.Quarantine, What: "is both the tagged output and the quarantine", Do: "name two files", Kind: ErrTarget}
	}
	for _, in := range inputs {
		if err := apart(d, in.Path, out); err != nil {
			return err
		}
	}
	return nil
}

// apart tells whether an input is none of the outputs.
func apart(d disk.FS, input string, out OutputPaths) error {
	in, err := d.Stat(input)
	if err != nil {
		return nil // the input is open; its name may be gone
	}
	for _, path := range []string{out.Tagged, out.Quarantine} {
		if path == "" || path == Pipe {
			continue
		}
		info, err := d.Stat(path)
		switch {
		case errors.Is(err, fs.ErrNotExist), errors.Is(err, syscall.ENOTDIR): // more about that in newTarget
		case err != nil:
			return (&Target{path: path}).fault("can't be looked at", ErrTarget, err)
		case os.SameFile(in, info):
			return &Error{Path: path, What: "is the input", Do: "name another output", Kind: ErrTarget}
		}
	}
	return nil
}

// resolved is the absolute path with the links of its folder followed.
func resolved(path string) string {
	dir, err := filepath.EvalSymlinks(filepath.Dir(path))
	if err != nil {
		dir = filepath.Dir(path)
	}
	if abs, err := filepath.Abs(dir); err == nil {
		dir = abs
	}
	return filepath.Join(dir, filepath.Base(path))
}
