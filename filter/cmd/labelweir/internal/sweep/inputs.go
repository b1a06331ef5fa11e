package sweep

import (
	"errors"
	"io"
	"io/fs"
	"os"
	"path/filepath"
	"strings"

	"labelweir/connectors/table"
	"labelweir/filter/config"
)

// inputs lists the files that a sweep reads, in order: each folder stands for the files in it, by name, whose ending is
// that of a format. stdin is read to its end into a file without a name, for a sweep may read its input twice. Close
// gives that file back.
func inputs(c *config.Config, stdin io.Reader) (list []table.Input, close func(), err error) {
	close = func() {}
	for _, name := range c.Input.Files() {
		if name == config.Pipe {
			file, err := spool(stdin)
			if err != nil {
				return nil, close, err
			}
			return []table.Input{{Path: config.Pipe, Title: c.Input.Title(), File: file}}, func() { file.Close() }, nil
		}
		info, err := os.Stat(name)
		if err != nil || !info.IsDir() {
			list = append(list, table.Input{Path: name}) // whoever opens it says what is wrong with it
			continue
		}
		files, err := folder(name, c.Input.Format != "")
		if err != nil {
			return nil, close, err
		}
		list = append(list, files...)
	}
	return list, close, nil
}

// folder lists the files of a folder by name; all of them, or those whose ending is that of a format.
func folder(path string, all bool) (list []table.Input, err error) {
	entries, err := os.ReadDir(path)
	if err != nil {
		return nil, &table.Error{Path: path, What: "the folder can't be read", Do: "check its permissions", Kind: table.ErrUnreadable, Err: bareCause(err)}
	}
	for _, e := range entries {
		full := filepath.Join(path, e.Name())
		info, err := os.Stat(full)
		if err == nil && info.Mode().IsRegular() && !strings.HasPrefix(e.Name(), ".") && (all || known(e.Name())) {
			list = append(list, table.Input{Path: full})
		}
	}
	if len(list) == 0 {
		return nil, &table.Error{Path: path, What: "no file in the folder has the ending of a format",
			Do: "name the files, or their format", Kind: table.ErrUnreadable}
	}
	return list, nil
}

// known tells whether a file's name has the ending of a format.
func known(name string) bool {
	for _, f := range formats() {
		for _, e := range f.Endings {
			if strings.HasSuffix(strings.ToLower(name), e) {
				return true
			}
		}
	}
	return false
}

// spool copies what comes in through a pipe into a file that vanishes with the process.
func spool(r io.Reader) (*os.File, error) {
	f, err := os.CreateTemp("", "labelweir-")
	if err == nil {
		_ = os.Remove(f.Name()) // what is open stays readable; elsewhere the system removes it later
		if _, err = io.Copy(f, r); err != nil {
			f.Close()
		}
	}
	if err != nil {
		return nil, &table.Error{Path: "standard input", What: "can't be kept in a file in " + os.TempDir(), Do: "make room, or set TMPDIR to a folder with room",
			Kind: table.ErrUnreadable, Err: bareCause(err)}
	}
	return f, nil
}

// bareCause takes the system call and the path off an error.
func bareCause(err error) error {
	var p *fs.PathError
	if errors.As(err, &p) {
		return p.Err
	}
	return err
}
