package sweep

import (
	"context"
	"errors"
	"io"
	"os"

	"labelweir/connectors/table"
	"labelweir/filter"
)

// stamps is what the files of an input looked like before they were read.
type stamps []stamp

type stamp struct {
	path string
	info os.FileInfo // nil: it could not be looked at, and opening it will say why
}

// takeStamps looks at the files; what came through a pipe can't change.
func takeStamps(files []table.Input) stamps {
	var s stamps
	for _, f := range files {
		if f.File == nil {
			info, _ := os.Stat(f.Path)
			s = append(s, stamp{f.Path, info})
		}
	}
	return s
}

// check tells whether a file is another than it was. A change within one tick of the file system's clock that leaves the
// size alone does not show here; filter compares what two readings give.
func (s stamps) check() error {
	for _, f := range s {
		if f.info == nil {
			continue
		}
		what := "was changed while it was read"
		now, err := os.Stat(f.path)
		switch {
		case errors.Is(err, os.ErrNotExist):
			what = "was removed while it was read"
		case err != nil:
			what = "can't be looked at any more"
		case !os.SameFile(now, f.info):
			what = "was replaced while it was read"
		case now.Size() == f.info.Size() && now.ModTime().Equal(f.info.ModTime()):
			continue
		}
		return &table.Error{Path: f.path, What: what, Do: "run again when nothing writes to it", Kind: table.ErrUnreadable}
	}
	return nil
}

// watch has a reading of the files end in the error of check where they have changed: what is read of a file in change
// looks damaged, and is not. It takes what opening them gave.
func (s stamps) watch(source filter.Source, err error) (filter.Source, error) {
	if changed := s.check(); changed != nil {
		if err == nil {
			source.Close()
		}
		return nil, changed
	}
	if err != nil {
		return nil, err
	}
	return &watched{source, s}, nil
}

// watched is a source of files that should not change.
type watched struct {
	filter.Source
	stamps stamps
}

// Next implements filter.Source.
func (w *watched) Next(ctx context.Context) (*filter.Batch, error) {
	b, err := w.Source.Next(ctx)
	if err != nil && (err == io.EOF || errors.Is(err, table.ErrUnreadable)) {
		if changed := w.stamps.check(); changed != nil {
			return nil, changed
		}
	}
	return b, err
}
