package arrowfile

import (
	"context"
	"errors"
	"fmt"
	"os"
	"path/filepath"
	"strings"
	"syscall"
	"testing"

	"labelweir/connectors/disk"
	"labelweir/connectors/table"
	"labelweir/filter"
)

// files lists what stands in a folder, hidden files too.
func files(t *testing.T, dir string) string {
	t.Helper()
	list, err := os.ReadDir(dir)
	if err != nil {
		t.Fatal(err)
	}
	var names []string
	for _, f := range list {
		names = append(names, f.Name())
	}
	return strings.Join(names, " ")
}

// carry sends apples.arrow through a sink on d, the way a command does.
func carry(d disk.FS, out table.OutputPaths, opt table.Options) (err error) {
	src, err := Open("testdata/apples.arrow", appleRecord, opt)
	if err != nil {
		return err
	}
	defer src.Close()
	sink, err := create(d, out, src, opt)
	if err != nil {
		return err
	}
	defer func() { err = errors.Join(err, sink.Close()) }()
	for range 3 {
		b, err := src.Next(context.Background())
		if err != nil {
			return err
		}
		err = sink.Deliver(context.Background(), b, tagsOf(b, tagOf))
		b.Release()
		if err != nil {
			return err
		}
	}
	return sink.Commit(context.Background())
}

func TestNoHalfFileStandsUnderATargetsName(t *testing.T) {
	for _, failure := range []struct {
		err   error
		stays bool
		text  string
	}{{syscall.ENOSPC, true, "disk is full"}, {syscall.EIO, false, "input/output error"}} {
		calls := map[string]bool{}
		for n := 0; ; n++ {
			dir := t.TempDir()
			out := table.OutputPaths{Tagged: filepath.Join(dir, "tagged.arrow"), Quarantine: filepath.Join(dir, "held.arrow")}
			opt := counted(t)
			opt.BlockRows, opt.BlockBytes = 30, 1<<20
			d := &disk.Failing{FS: lazy{}, Err: failure.err, At: n, Stays: failure.stays}
			err := carry(d, out, opt)
			call, path, fired := d.Fired()
			if !fired {
				if err != nil || files(t, dir) != "held.arrow tagged.arrow" {
					t.Errorf("without a failure: got %v and %s", err, files(t, dir))
				}
				break
			}
			calls[call] = true
			if path == "testdata/apples.arrow" && err == nil {
				continue // only the check whether input and output are the same file is left out
			}
			if err == nil {
				t.Errorf("call %d, %s of %s fails: no error", n, call, path)
				continue
			}
			if !strings.Contains(err.Error(), failure.text) || !strings.Contains(err.Error(), dir) {
				t.Errorf("call %d, %s of %s fails: got %q, want the path and %q", n, call, path, err, failure.text)
			}
			if !errors.Is(err, table.ErrWrite) && !errors.Is(err, table.ErrTarget) {
				t.Errorf("call %d, %s of %s fails: %v is of no kind", n, call, path, err)
			}
			if left := files(t, dir); left != "" && call != "remove" {
				t.Errorf("call %d, %s of %s fails: left are %s", n, call, path, left)
			}
		}
		for _, call := range []string{"create", "write", "sync", "close", "stat", "rename", "syncdir"} {
			if !calls[call] {
				t.Errorf("%v: no %s was made to fail", failure.err, call)
			}
		}
	}
}

func TestFailedReplacementLeavesAWholeFile(t *testing.T) {
	before := []byte("what stood here before")
	for n := 0; ; n++ {
		dir := t.TempDir()
		out := table.OutputPaths{Tagged: filepath.Join(dir, "tagged.arrow"), Quarantine: filepath.Join(dir, "held.arrow")}
		if err := errors.Join(os.WriteFile(out.Tagged, before, 0o644), os.WriteFile(out.Quarantine, before, 0o644)); err != nil {
			t.Fatal(err)
		}
		opt := counted(t)
		opt.Replace = true
		d := &disk.Failing{FS: lazy{}, Err: syscall.EIO, At: n}
		err := carry(d, out, opt)
		call, path, fired := d.Fired()
		if !fired {
			break
		}
		if files(t, dir) != "held.arrow tagged.arrow" && call != "remove" {
			t.Errorf("call %d, %s of %s fails with %v: left are %s", n, call, path, err, files(t, dir))
		}
		for _, name := range []string{out.Tagged, out.Quarantine} {
			now, err := os.ReadFile(name)
			if err != nil {
				t.Fatal(err)
			}
			if string(now) == string(before) {
				continue
			}
			if err := readWhole(name, appleRecord, counted(t)); err != nil {
				t.Errorf("call %d, %s of %s fails: %s is neither the old file nor a whole new one: %v", n, call, path, name, err)
			}
		}
	}
}

func TestCloseWithoutCommitLeavesNothing(t *testing.T) {
	dir := t.TempDir()
	opt := counted(t)
	src := open(t, "testdata/apples.arrow", appleRecord, opt)
	sink, err := table.Create(table.OutputPaths{Tagged: filepath.Join(dir, "a"), Quarantine: filepath.Join(dir, "b")}, src, opt)
	if err != nil {
		t.Fatal(err)
	}
	b, err := src.Next(context.Background())
	if err != nil {
		t.Fatal(err)
	}
	defer b.Release()
	if err := sink.Deliver(context.Background(), b, tagsOf(b, tagOf)); err != nil {
		t.Fatal(err)
	}
	if got := files(t, dir); !strings.HasPrefix(got, ".a.part-") {
		t.Errorf("while writing: got files %s", got)
	}
	if err := errors.Join(sink.Close(), sink.Close()); err != nil {
		t.Fatal(err)
	}
	if got := files(t, dir); got != "" {
		t.Errorf("got files %s", got)
	}
	if err := sink.Commit(context.Background()); !errors.Is(err, table.ErrClosed) {
		t.Errorf("commit after close gives %v", err)
	}
}

func TestRowsAddUp(t *testing.T) {
	opt := counted(t)
	src := open(t, "testdata/apples.arrow", appleRecord, opt)
	sink, err := table.Create(outIn(t, ".arrow"), src, opt)
	if err != nil {
		t.Fatal(err)
	}
	defer sink.Close()
	rows := int64(0)
	each(t, src, func(b *filter.Batch) {
		if err := sink.Deliver(context.Background(), b, tagsOf(b, tagOf)); err != nil {
			t.Fatal(err)
		}
		rows += int64(b.Rows())
		if tagged, held := sink.Rows(); tagged+held != rows {
			t.Errorf("got %d and %d of %d rows", tagged, held, rows)
		}
	})
	if err := sink.Commit(context.Background()); err != nil {
		t.Fatal(err)
	}
	if tagged, held := sink.Rows(); tagged != 83 || held != 17 {
		t.Errorf("got %d and %d rows, want 83 and 17", tagged, held)
	}
}

func TestBadOutputIsExplained(t *testing.T) {
	dir := t.TempDir()
	path := func(name string) string { return filepath.Join(dir, name) }
	input := path("apples.arrow")
	whole, err := os.ReadFile("testdata/apples.arrow")
	if err != nil {
		t.Fatal(err)
	}
	for name, b := range map[string][]byte{"apples.arrow": whole, "old.arrow": []byte("old")} {
		if err := os.WriteFile(path(name), b, 0o644); err != nil {
			t.Fatal(err)
		}
	}
	if err := errors.Join(os.Symlink(input, path("link.arrow")), os.Symlink(dir, path("here"))); err != nil {
		t.Fatal(err)
	}
	src := open(t, input, appleRecord, counted(t))
	var b strings.Builder
	for _, x := range []struct {
		about string
		out   table.OutputPaths
		opt   table.Options
	}{
		{"no output", table.OutputPaths{}, table.Options{}},
		{"target exists", table.OutputPaths{Tagged: path("old.arrow"), Quarantine: path("q")}, table.Options{}},
		{"quarantine exists", table.OutputPaths{Tagged: path("new"), Quarantine: path("old.arrow")}, table.Options{}},
		{"target is the input", table.OutputPaths{Tagged: input, Quarantine: ""}, table.Options{Replace: true}},
		{"target is a link to the input", table.OutputPaths{Tagged: path("link.arrow"), Quarantine: ""}, table.Options{Replace: true}},
		{"quarantine is the input", table.OutputPaths{Tagged: path("new"), Quarantine: input}, table.Options{Replace: true}},
		{"both are one", table.OutputPaths{Tagged: path("new"), Quarantine: path("here/new")}, table.Options{}},
		{"folder missing", table.OutputPaths{Tagged: path("no/such/new"), Quarantine: ""}, table.Options{}},
		{"folder is a file", table.OutputPaths{Tagged: path("old.arrow/new"), Quarantine: ""}, table.Options{}},
		{"target is a folder", table.OutputPaths{Tagged: dir, Quarantine: ""}, table.Options{Replace: true}},
		{"target is a device", table.OutputPaths{Tagged: "/dev/null", Quarantine: ""}, table.Options{Replace: true}},
	} {
		before := files(t, dir)
		sink, err := table.Create(x.out, src, x.opt)
		if err == nil {
			sink.Close()
		}
		var own *table.Error
		if !errors.As(err, &own) || !errors.Is(err, table.ErrTarget) || own.Do == "" {
			t.Errorf("%s: got %v, want an Error with advice that wraps table.ErrTarget", x.about, err)
			continue
		}
		if after := files(t, dir); after != before {
			t.Errorf("%s: left are %s", x.about, after)
		}
		fmt.Fprintf(&b, "%s\n    %s\n", x.about, strings.ReplaceAll(err.Error(), dir, "DIR"))
	}
	fmt.Fprintf(&b, "tagged already\n    %s\n", strings.ReplaceAll(taggedTwice(t, dir), dir, "DIR"))
	fmt.Fprintf(&b, "held back without a quarantine\n    %s\n", strings.ReplaceAll(heldNowhere(t, dir, src), dir, "DIR"))
	d := &disk.Failing{FS: disk.OS{}, Err: &os.PathError{Op: "open", Path: "x", Err: syscall.EACCES}, Call: "create"}
	_, err = create(d, table.OutputPaths{Tagged: path("new")}, src, table.Options{})
	fmt.Fprintf(&b, "folder not writable\n    %s\n", strings.ReplaceAll(fmt.Sprint(err), dir, "DIR"))
	err = carry(&disk.Failing{FS: lazy{}, Err: syscall.ENOSPC, Call: "write", Stays: true}, table.OutputPaths{Tagged: path("new"), Quarantine: path("q")}, table.Options{BlockRows: 5, BlockBytes: 1 << 20})
	fmt.Fprintf(&b, "disk full\n    %s\n", strings.ReplaceAll(fmt.Sprint(err), dir, "DIR"))
	golden(t, "output_faults.txt", b.String())
}

// taggedTwice is the message for an input that has been tagged before.
func taggedTwice(t *testing.T, dir string) string {
	out := table.OutputPaths{Tagged: filepath.Join(dir, "once.arrow"), Quarantine: filepath.Join(dir, "once_held.arrow")}
	copyFile(t, open(t, "testdata/apples.arrow", appleRecord, counted(t)), out, counted(t), tagOf)
	_, err := table.Create(table.OutputPaths{Tagged: filepath.Join(dir, "twice.arrow")}, open(t, out.Tagged, appleRecord, counted(t)), table.Options{})
	if !errors.Is(err, table.ErrColumn) {
		t.Errorf("got %v, want table.ErrColumn", err)
	}
	return fmt.Sprint(err)
}

// heldNowhere is the message for a record to be held back when there is no quarantine.
func heldNowhere(t *testing.T, dir string, src *table.Source) string {
	sink, err := table.Create(table.OutputPaths{Tagged: filepath.Join(dir, "new")}, src, counted(t))
	if err != nil {
		t.Fatal(err)
	}
	defer sink.Close()
	b, err := src.Next(context.Background())
	if err != nil {
		t.Fatal(err)
	}
	defer b.Release()
	err = sink.Deliver(context.Background(), b, tagsOf(b, tagOf))
	if !errors.Is(err, table.ErrTarget) || !errors.Is(sink.Commit(context.Background()), table.ErrTarget) {
		t.Errorf("got %v, want table.ErrTarget, also from Commit", err)
	}
	return fmt.Sprint(err)
}
