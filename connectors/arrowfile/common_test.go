package arrowfile

import (
	"context"
	"flag"
	"fmt"
	"io"
	"math"
	"os"
	"path/filepath"
	"runtime"
	"testing"
	"time"

	"github.com/apache/arrow/go/v16/arrow/memory"

	"labelweir/connectors/disk"
	"labelweir/connectors/table"
	"labelweir/filter"
	"labelweir/model"
)

var update = flag.Bool("update", false, "write the golden files anew")

// TestMain fails when a test leaves a goroutine behind.
func TestMain(m *testing.M) {
	flag.Parse()
	before := runtime.NumGoroutine()
	code := m.Run()
	if fuzz := flag.Lookup("test.fuzz"); fuzz != nil && fuzz.Value.String() != "" {
		os.Exit(code) // the fuzzing engine leaves a goroutine of its own
	}
	for range 100 {
		if runtime.NumGoroutine() <= before {
			os.Exit(code)
		}
		runtime.Gosched()
		<-time.After(10 * time.Millisecond)
	}
	buf := make([]byte, 1<<16)
	fmt.Printf("%d goroutines before the tests, %d after\n%s\n", before, runtime.NumGoroutine(), buf[:runtime.Stack(buf, true)])
	os.Exit(1)
}

// counted gives options whose memory must have been given back when the test ends.
func counted(t testing.TB) table.Options {
	mem := memory.NewCheckedAllocator(memory.NewGoAllocator())
	t.Cleanup(func() { mem.AssertSize(t, 0) })
	return table.Options{Memory: mem}
}

func open(t testing.TB, path string, rec filter.Record, opt table.Options) *table.Source {
	t.Helper()
	src, err := Open(path, rec, opt)
	if err != nil {
		t.Fatal(err)
	}
	t.Cleanup(func() { src.Close() })
	return src
}

// create is table.Create on a disk.
func create(d disk.FS, out table.OutputPaths, src *table.Source, opt table.Options) (*table.Sink, error) {
	opt.Disk = d
	return table.Create(out, src, opt)
}

// each calls do for every batch of src, to its end.
func each(t testing.TB, src *table.Source, do func(b *filter.Batch)) {
	t.Helper()
	for {
		b, err := src.Next(context.Background())
		if err == io.EOF {
			return
		}
		if err != nil {
			t.Fatal(err)
		}
		do(b)
		b.Release()
	}
}

// rowsOf gives the content of batches row by row, codes replaced by names with the code beside, so that it can be
// compared whatever the batch sizes are.
func rowsOf(b *filter.Batch) []string {
	t := b.Table
	out := make([]string, b.Rows())
	for i := range out {
		s := fmt.Sprintf("%d %x label=%s", b.First+int64(i), t.Keys[i], nameOf(t.Labels[i], t.Classes))
		if t.Sources != nil {
			s += " source=" + nameOf(t.Sources[i], t.SourceNames)
		}
		if b.Times != nil {
			s += fmt.Sprintf(" time=%d", b.Times[i])
		}
		for _, c := range t.Columns {
			if c.Kind == model.Category {
				s += fmt.Sprintf(" %s=%s", c.Name, nameOf(c.Codes[i], c.Levels))
			} else {
				s += fmt.Sprintf(" %s=%v", c.Name, c.Values[i*c.Size:(i+1)*c.Size])
			}
		}
		out[i] = s
	}
	return out
}

func nameOf(code int32, names []string) string {
	if code < 0 {
		return "none"
	}
	return fmt.Sprintf("%d:%s", code, names[code])
}

// allRows reads a file whole.
func allRows(t testing.TB, src *table.Source) (rows []string) {
	t.Helper()
	each(t, src, func(b *filter.Batch) { rows = append(rows, rowsOf(b)...) })
	return rows
}

// tagOf is the tag that tests deliver with a row: one in six held back, one in five unscored.
func tagOf(row int64) filter.Tag {
	tag := filter.Tag{Score: float64(row%1000) / 1000, Margin: 3 - float64(row%11), Implied: fmt.Sprintf("class %d", row%3),
		Snapshot: fmt.Sprintf("%012x", row/50), Verdict: filter.Verdict(row % 3), Divert: row%6 == 2}
	if row%5 == 4 {
		tag = filter.Tag{Score: math.NaN(), Margin: math.NaN(), Verdict: filter.Unscored, Reason: model.Reason(1 + row/5%5), Divert: row%6 == 2}
	}
	return tag
}

func tagsOf(b *filter.Batch, tag func(int64) filter.Tag) []filter.Tag {
	tags := make([]filter.Tag, b.Rows())
	for i := range tags {
		tags[i] = tag(b.First + int64(i))
	}
	return tags
}

// copyFile sends all of src through a sink.
func copyFile(t testing.TB, src *table.Source, out table.OutputPaths, opt table.Options, tag func(int64) filter.Tag) {
	t.Helper()
	sink, err := create(lazy{}, out, src, opt)
	if err != nil {
		t.Fatal(err)
	}
	defer sink.Close()
	each(t, src, func(b *filter.Batch) {
		if err := sink.Deliver(context.Background(), b, tagsOf(b, tag)); err != nil {
			t.Fatal(err)
		}
	})
	if err := sink.Commit(context.Background()); err != nil {
		t.Fatal(err)
	}
}

// lazy is the machine's disk without waiting for it.
type lazy struct{ disk.OS }

type lazyFile struct{ disk.File }

func (lazyFile) Sync() error { return nil }

func (lazy) SyncDir(string) error { return nil }

func (l lazy) Create(path string) (disk.File, error) {
	f, err := l.OS.Create(path)
	if err != nil {
		return nil, err
	}
	return lazyFile{f}, nil
}

// outIn gives output paths in a fresh folder.
func outIn(t testing.TB, ext string) table.OutputPaths {
	dir := t.TempDir()
	return table.OutputPaths{Tagged: filepath.Join(dir, "tagged"+ext), Quarantine: filepath.Join(dir, "held"+ext)}
}

// golden compares got with a file of testdata, or writes it.
func golden(t *testing.T, name, got string) {
	t.Helper()
	path := filepath.Join("testdata", name)
	if *update {
		if err := os.WriteFile(path, []byte(got), 0o644); err != nil {
			t.Fatal(err)
		}
		return
	}
	want, err := os.ReadFile(path)
	if err != nil {
		t.Fatal(err)
	}
	if got != string(want) {
		t.Errorf("%s: got\n%s\nwant\n%s", path, got, want)
	}
}

var appleRecord = filter.Record{Label: "grade", Source: "grader", Time: "graded_at"}
