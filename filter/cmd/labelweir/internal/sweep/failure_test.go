package sweep_test

import (
	"context"
	"errors"
	"io"
	"os"
	"path/filepath"
	"strings"
	"syscall"
	"testing"
	"time"

	"labelweir/connectors/disk"
	"labelweir/connectors/table"
	"labelweir/filter"
	"labelweir/filter/cmd/labelweir/internal/demo"
	"labelweir/filter/cmd/labelweir/internal/sweep"
	"labelweir/filter/config"
	"labelweir/model"
)

// quick is a learner, snapshot and scorer that finds every tenth label wrong without a look.
type quick struct{}

func (quick) Fit(_ context.Context, t *model.Table) (*filter.Fit, error) {
	scores := make([]model.Score, t.Rows())
	return &filter.Fit{Snapshot: quick{}, Scores: scores}, quick{}.Score(t, 0, len(scores), scores)
}

func (quick) ID() string { return "0123456789ab" }
func (quick) Facts() *model.Facts {
	return &model.Facts{Rows: 1, Classes: []string{"a", "b"}, ClassRows: []int{1, 1}, Threshold: 0.9}
}
func (quick) NewScorer() filter.Scorer { return quick{} }

func (quick) WriteTo(w io.Writer) (int64, error) {
	n, err := io.WriteString(w, "all that was learned")
	return int64(n), err
}

func (quick) Score(t *model.Table, lo, hi int, dst []model.Score) error {
	for i := lo; i < hi; i++ {
		dst[i-lo] = model.Score{P: 0.01}
		if t.Keys[i]%10 == 0 {
			dst[i-lo].P = 0.99
		}
	}
	return nil
}

// unsynced is the machine's disk without waiting for it.
type unsynced struct{ disk.OS }

func (unsynced) Create(path string) (disk.File, error) {
	f, err := disk.OS{}.Create(path)
	if err != nil {
		return nil, err
	}
	return unsyncedFile{f}, nil
}

func (unsynced) SyncDir(dir string) error { _, err := os.Stat(dir); return err }

type unsyncedFile struct{ disk.File }

func (unsyncedFile) Sync() error { return nil }

// names of the outputs, as they are listed in a folder.
const names = "held.arrow last.weir report.json tagged.arrow"

// job gives the settings of a sweep from in that writes all outputs to dir.
func job(t *testing.T, in, dir string) *config.Config {
	t.Helper()
	l := config.NewLoader()
	for path, value := range map[string]string{
		"input.file.path": in, "record.label": "grade", "filter.mode": "divert",
		"output.file.tagged": filepath.Join(dir, "tagged.arrow"), "output.file.quarantine": filepath.Join(dir, "held.arrow"),
		"output.file.report": filepath.Join(dir, "report.json"), "output.file.snapshot": filepath.Join(dir, "last.weir"),
	} {
		l.Flag(path, path, value)
	}
	c, err := l.Sweep()
	if err != nil {
		t.Fatal(err)
	}
	return c
}

func listed(t *testing.T, dir string) string {
	t.Helper()
	list, err := os.ReadDir(dir)
	if err != nil {
		t.Fatal(err)
	}
	var all []string
	for _, f := range list {
		all = append(all, f.Name())
	}
	return strings.Join(all, " ")
}

// input writes a line of apples and gives its path.
func input(t *testing.T, rows int) string {
	t.Helper()
	path := filepath.Join(t.TempDir(), "line.arrow")
	if err := demo.Grow(rows, 1).WriteLine(path); err != nil {
		t.Fatal(err)
	}
	return path
}

// Each call to the disk fails once, over all outputs: there is an error that names the output, no file stands under a
// final name, and none is left half written.
func TestNoOutputStandsAloneWhateverFails(t *testing.T) {
	in := input(t, 500)
	before, err := os.ReadFile(in)
	if err != nil {
		t.Fatal(err)
	}
	for _, failure := range []struct {
		err   error
		stays bool
		text  string
	}{{syscall.ENOSPC, true, "disk is full"}, {syscall.EIO, false, "input/output error"}} {
		calls, paths := map[string]bool{}, map[string]bool{}
		for n := 0; ; n++ {
			dir := t.TempDir()
			d := &disk.Failing{FS: unsynced{}, Err: failure.err, At: n, Stays: failure.stays}
			_, err := sweep.Run(t.Context(), job(t, in, dir), sweep.Watch{Learner: quick{}, Disk: d})
			call, path, fired := d.Fired()
			if !fired {
				if err != nil || listed(t, dir) != names {
					t.Errorf("without a failure: got %v and %s", err, listed(t, dir))
				}
				break
			}
			calls[call], paths[final(path)] = true, true
			if path == in && err == nil {
				continue // only the check whether input and output are the same file is left out
			}
			var own *table.Error
			if !errors.As(err, &own) || !strings.Contains(err.Error(), failure.text) || !strings.Contains(err.Error(), dir) {
				t.Errorf("call %d, %s of %s fails: got %v, want the path and %q", n, call, path, err, failure.text)
			}
			if left := listed(t, dir); left != "" {
				t.Errorf("call %d, %s of %s fails: left are %s", n, call, path, left)
			}
		}
		for _, call := range []string{"create", "write", "sync", "close", "stat", "rename", "syncdir"} {
			if !calls[call] {
				t.Errorf("%v: no %s was made to fail", failure.err, call)
			}
		}
		for _, name := range strings.Fields(names) {
			if !paths[name] {
				t.Errorf("%v: no call for %s was made to fail", failure.err, name)
			}
		}
	}
	if after, err := os.ReadFile(in); err != nil || string(after) != string(before) {
		t.Errorf("the input was touched: %v", err)
	}
}

// final is the name that a file is to have: .report.json.part-7-0 becomes report.json.
func final(path string) string {
	name, _, _ := strings.Cut(filepath.Base(path), ".part-")
	return strings.TrimPrefix(name, ".")
}

// meddling is a disk on which something happens at the first call of a name that concerns a file.
type meddling struct {
	unsynced
	at, name string
	do       func()
}

func (m *meddling) Rename(from, to string) error {
	m.happen("rename", to)
	return m.unsynced.Rename(from, to)
}

func (m *meddling) Stat(path string) (os.FileInfo, error) {
	m.happen("stat", path)
	return m.unsynced.Stat(path)
}

func (m *meddling) happen(call, path string) {
	if do := m.do; do != nil && m.at == call && filepath.Base(path) == m.name {
		m.do = nil
		do()
	}
}

func TestAFolderThatIsRemovedMeanwhileIsNamed(t *testing.T) {
	in, dir := input(t, 500), filepath.Join(t.TempDir(), "out")
	if err := os.Mkdir(dir, 0o777); err != nil {
		t.Fatal(err)
	}
	w := sweep.Watch{Learner: quick{}, Disk: unsynced{}}
	w.Progress = func(string, int64, int64) { os.RemoveAll(dir) }
	_, err := sweep.Run(t.Context(), job(t, in, dir), w)
	if !errors.Is(err, table.ErrWrite) || !strings.Contains(err.Error(), "its folder was removed") {
		t.Errorf("got %v", err)
	}
	if _, err := os.Stat(dir); err == nil {
		t.Errorf("the folder is there again, with %s", listed(t, dir))
	}
}

func TestAFileThatCameMeanwhileIsNotWrittenOver(t *testing.T) {
	in := input(t, 500)
	for _, name := range strings.Fields(names) {
		dir := t.TempDir()
		path := filepath.Join(dir, name)
		d := &meddling{at: "rename", name: "last.weir", do: func() {
			if err := os.WriteFile(path, []byte("another's"), 0o666); err != nil {
				t.Error(err)
			}
		}}
		if name == "last.weir" { // whose name is the first to be taken
			d.at = "stat"
			skip := d.do
			d.do = func() { d.do = skip } // not while outputs are being created
		}
		_, err := sweep.Run(t.Context(), job(t, in, dir), sweep.Watch{Learner: quick{}, Disk: d})
		if !errors.Is(err, table.ErrTarget) || !strings.Contains(err.Error(), path) {
			t.Errorf("%s: got %v", name, err)
		}
		if got, err := os.ReadFile(path); err != nil || string(got) != "another's" || listed(t, dir) != name {
			t.Errorf("%s holds %q, %v; beside it are %s", name, got, err, listed(t, dir))
		}
	}
}

func TestAnInputThatChangesIsNotTrusted(t *testing.T) {
	whole := input(t, 2000)
	bytes, err := os.ReadFile(whole)
	if err != nil {
		t.Fatal(err)
	}
	for _, c := range []struct {
		what, at, want string
		change         func(path string) error
	}{
		{"touched after reading", "score", "was changed", func(p string) error { return os.Chtimes(p, time.Time{}, time.Unix(1, 0)) }},
		{"cut between two readings", "read", "was changed", func(p string) error { return os.Truncate(p, int64(len(bytes)/2)) }},
		{"grown after reading", "score", "was changed", func(p string) error { return os.WriteFile(p, append(bytes, 0), 0o666) }},
		{"removed between two readings", "read", "was removed", os.Remove},
		{"replaced between two readings", "read", "was replaced", func(p string) error {
			return errors.Join(os.WriteFile(p+".new", bytes, 0o666), os.Rename(p+".new", p))
		}},
	} {
		t.Run(c.what, func(t *testing.T) {
			in, dir := filepath.Join(t.TempDir(), "line.arrow"), t.TempDir()
			if err := os.WriteFile(in, bytes, 0o666); err != nil {
				t.Fatal(err)
			}
			done := false
			w := sweep.Watch{Learner: quick{}, Disk: unsynced{}}
			w.Progress = func(phase string, _, _ int64) {
				if phase == c.at && !done {
					done = true
					if err := c.change(in); err != nil {
						t.Error(err)
					}
				}
			}
			_, err := sweep.Run(t.Context(), job(t, in, dir), w)
			if !errors.Is(err, table.ErrUnreadable) || !strings.Contains(err.Error(), in) || !strings.Contains(err.Error(), c.want) {
				t.Errorf("got %v", err)
			}
			if left := listed(t, dir); left != "" {
				t.Errorf("left are %s", left)
			}
		})
	}
}
