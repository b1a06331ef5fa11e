package demo

import (
	"context"
	"errors"
	"fmt"
	"io"
	"io/fs"
	"os"
	"path/filepath"
	"strconv"

	"labelweir/filter"
	"labelweir/filter/cmd/labelweir/internal/sweep"
	"labelweir/filter/config"
)

// Options of a demo.
type Options struct {
	Rows int    // apples; default 8000
	Seed uint64 // of the harvest and of the sweep; default 1
	Dir  string // folder to keep the files in; empty: a temporary one that is removed
}

// MinRows is the fewest apples for which halves and graders can be told apart.
const MinRows = 500

// DefaultOptions gives the defaults named in Options.
func DefaultOptions() Options { return Options{Rows: 8000, Seed: 1} }

// Run grows a harvest, sweeps it, and writes to out what was planted and found. The files it keeps are line.arrow and
// planted.arrow, and passed.arrow, held.arrow, report.json and last.weir from the sweep; none of them may exist.
func Run(ctx context.Context, o Options, out io.Writer, w sweep.Watch) (*Outcome, error) {
	dir := o.Dir
	if dir == "" {
		temp, err := os.MkdirTemp("", "labelweir-demo-")
		if err != nil {
			return nil, fmt.Errorf("no temporary folder: %w; set TMPDIR, or give --out DIR", err)
		}
		defer os.RemoveAll(temp)
		dir = temp
	} else if err := os.MkdirAll(dir, 0o777); err != nil {
		return nil, err
	}
	h := Grow(o.Rows, o.Seed)
	line := filepath.Join(dir, "line.arrow")
	if err := errors.Join(h.WriteLine(line), h.WritePlanted(filepath.Join(dir, "planted.arrow"))); err != nil {
		if errors.Is(err, fs.ErrExist) {
			return nil, fmt.Errorf("%s: files of an earlier demo are there; name another folder", dir)
		}
		return nil, err
	}
	introduce(out, h)
	c, call, err := settings(o, dir)
	if err != nil {
		return nil, err
	}
	fmt.Fprintf(out, "\n  %s\n\n", call)
	report, err := sweep.Run(ctx, c, w)
	if err != nil {
		return nil, err
	}
	if err := report.WriteText(out); err != nil {
		return nil, err
	}
	f, err := readFound(h.Rows(), c.Output.Tagged, c.Output.Quarantine)
	if err != nil {
		return nil, err
	}
	outcome := compare(h, f)
	fmt.Fprintln(out)
	return outcome, outcome.WriteText(out)
}

// settings gives those of the sweep, and the same as a command line.
func settings(o Options, dir string) (c *config.Config, call string, err error) {
	l := config.NewLoader()
	l.Flag("FILE", "input.file.path", filepath.Join(dir, "line.arrow"))
	call = "labelweir sweep line.arrow"
	for _, s := range []struct {
		flag, path, value string
		file              bool
	}{
		{"label", "record.label", "grade", false},
		{"source", "record.source", "grader", false},
		{"time", "record.time", "graded_at", false},
		{"seed", "retrain.seed", strconv.FormatUint(o.Seed, 10), false},
		{"mode", "filter.mode", filter.Divert.String(), false},
		{"out", "output.file.tagged", "passed.arrow", true},
		{"quarantine", "output.file.quarantine", "held.arrow", true},
		{"report", "output.file.report", "report.json", true},
		{"snapshot", "output.file.snapshot", "last.weir", true},
	} {
		call += " --" + s.flag + " " + s.value
		if s.file {
			s.value = filepath.Join(dir, s.value)
		}
		l.Flag("--"+s.flag, s.path, s.value)
	}
	c, err = l.Sweep()
	return c, call, err
}
