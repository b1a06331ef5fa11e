package table

import (
	"errors"
	"fmt"
	"os"
	"path/filepath"
	"strings"
)

// partName is the name under which an output is written until it is whole: hidden, beside its place, and telling which
// process writes it. n tells several tries apart.
func partName(path string, pid, n int) string {
	return filepath.Join(filepath.Dir(path), fmt.Sprintf("%s%d", partStem(path, pid), n))
}

func partStem(path string, pid int) string {
	return fmt.Sprintf(".%s.part-%d-", filepath.Base(path), pid)
}

// RemoveParts removes what a process that has died left of the output path. A folder that is gone holds nothing.
func RemoveParts(path string, pid int) error {
	dir := filepath.Dir(path)
	list, err := os.ReadDir(dir)
	if err != nil && !errors.Is(err, os.ErrNotExist) {
		return &Error{Path: path, What: "its folder can't be looked at for an unfinished file", Kind: ErrWrite, Err: bare(err)}
	}
	var errs []error
	for _, f := range list {
		if !strings.HasPrefix(f.Name(), partStem(path, pid)) {
			continue
		}
		if err := os.Remove(filepath.Join(dir, f.Name())); err != nil && !errors.Is(err, os.ErrNotExist) {
			errs = append(errs, &Error{Path: path, What: fmt.Sprintf("the unfinished file %s can't be removed", f.Name()),
				Do: "remove it by hand", Kind: ErrWrite, Err: bare(err)})
		}
	}
	return errors.Join(errs...)
}
