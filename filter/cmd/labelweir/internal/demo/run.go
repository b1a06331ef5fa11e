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

	"labelweir/connectors/table"
	"labelweir/filter"
	"labelweir/filter/cmd/labelweir/internal/sweep"
	"labelweir/filter/config"
)

// Options of a demo.
type Options struct {
	Rows   int    // apples; default 8000
	Seed   uint64 // of the harvest and of the sweep; default 1
	Window int    // rows of a sliding window; default 0: the whole line is one window
	Dir    string // folder to keep the files in; empty: a temporary one that is removed
}

// MinRows is the fewest apples for which halves and graders can be told apart.
const MinRows = 500

// DefaultOptions gives the defaults named in Options.
func DefaultOptions() Options { return Options{Rows: 8000, Seed: 1} }

// Run grows a harvest, sweeps it, and writes to out what was planted and found. The files it keeps are line.arrow and
// planted.arrow, and passed.arrow, held.arrow, report.json and last.weir from the sweep; none of them may exist.
func Run(ctx context.Context, o Options, out io.Writer, w sweep.Watch) (*Outcome, error) {
	dir, done, err := folder(o.Dir)
	if err != nil {
		return nil, err
	}
	defer done()
	h := Grow(o.Rows, o.Seed)
	if err := h.write(dir); err != nil {
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

// folder gives the folder to work in, and what to call when it has served.
func folder(wanted string) (dir string, done func(), err error) {
	if wanted == "" {
		dir, err := os.MkdirTemp("", "labelweir-demo-")
		if err != nil {
			return "", nil, &table.Error{Path: os.TempDir(), What: "no temporary folder can be made in it",
				Do: "set TMPDIR, or give --out DIR", Kind: table.ErrTarget, Err: bare(err)}
		}
		return dir, func() { os.RemoveAll(dir) }, nil
	}
	if err := os.MkdirAll(wanted, 0o777); err != nil {
		return "", nil, &table.Error{Path: wanted, What: "the folder can't be made", Do: "name another one",
			Kind: table.ErrTarget, Err: bare(err)}
	}
	return wanted, func() {}, nil
}

// write puts what the line recorded and the truth into the folder.
func (h *Harvest) write(dir string) error {
	for _, file := range []struct {
		name  string
		write func(path string) error
	}{{"line.arrow", h.WriteLine}, {"planted.arrow", h.WritePlanted}} {
		path := filepath.Join(dir, file.name)
		err := file.write(path)
		switch {
		case errors.Is(err, fs.ErrExist):
			return &table.Error{Path: path, What: "is there from an earlier demo", Do: "name another folder", Kind: table.ErrTarget}
		case err != nil:
			return &table.Error{Path: path, What: "can't be written", Do: "name a folder with room that can be written to",
				Kind: table.ErrWrite, Err: bare(err)}
		}
	}
	return nil
}

// bare takes the path off an error, where the message names it already.
func bare(err error) error {
	var p *fs.PathError
	if errors.As(err, &p) {
		return p.Err
	}
	return err
}

// flag is one of sweep's, the setting it stands for, and its value: a file of the demo's folder when file is set.
type flag struct {
	name, path, value string
	file              bool
}

// settings gives those of the sweep, and the same as a command line.
func settings(o Options, dir string) (c *config.Config, call string, err error) {
	l := config.NewLoader()
	l.Flag("FILE", "input.file.path", filepath.Join(dir, "line.arrow"))
	call = "labelweir sweep line.arrow"
	flags := []flag{
		{"label", "record.label", "grade", false},
		{"source", "record.source", "grader", false},
		{"time", "record.time", "graded_at", false},
		{"seed", "retrain.seed", strconv.FormatUint(o.Seed, 10), false},
		{"mode", "filter.mode", filter.Divert.String(), false},
		{"out", "output.file.tagged", "passed.arrow", true},
		{"quarantine", "output.file.quarantine", "held.arrow", true},
		{"report", "output.file.report", "report.json", true},
		{"snapshot", "output.file.snapshot", "last.weir", true},
	}
	if o.Window > 0 {
		flags = append(flags, flag{"window", "window.records", strconv.Itoa(o.Window), false},
			flag{"retrain", "retrain.every", "20%", false}, flag{"hold", "filter.hold", strconv.Itoa(o.Window / 5), false})
	}
	for _, f := range flags {
		call += " --" + f.name + " " + f.value
		if f.file {
			f.value = filepath.Join(dir, f.value)
		}
		l.Flag("--"+f.name, f.path, f.value)
	}
	c, err = l.Sweep()
	return c, call, err
}
