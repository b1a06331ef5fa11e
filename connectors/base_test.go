package connectors

import (
	"bytes"
	"context"
	"errors"
	"fmt"
	"io"
	"os"
	"path/filepath"
	"testing"

	"github.com/apache/arrow/go/v16/arrow"
	"github.com/apache/arrow/go/v16/arrow/ipc"

	"labelweir/connectors/arrowfile"
	"labelweir/connectors/csv"
	"labelweir/connectors/disk"
	"labelweir/connectors/jsonlines"
	"labelweir/connectors/parquet"
	"labelweir/connectors/table"
	"labelweir/filter"
	"labelweir/model"
)

func formats() []table.Format {
	return append(arrowfile.Formats(), parquet.Format(), csv.Format(), jsonlines.Format())
}

// base is a whole file to be damaged.
type base struct {
	name   string // with the format's ending
	label  string
	bytes  []byte
	nested bool // arrow/go reads it in goroutines of its own, whose panics end the process
}

// bases are the test files of the formats' own packages, Arrow ones also compressed, and the packing line as text.
func bases(t testing.TB) []base {
	t.Helper()
	var all []base
	for _, f := range []struct{ name, label string }{
		{"apples.arrow", "grade"}, {"apples.arrows", "grade"}, {"types.arrow", "label"}, {"types.arrows", "label"},
		{"unions.arrow", "label"}, {"grows.arrow", "label"}, {"grows.arrows", "label"}, {"replaced.arrows", "label"}, {"apples_v4.arrow", "grade"},
	} {
		b := read(t, "arrowfile/testdata/"+f.name)
		all = append(all, base{name: f.name, label: f.label, bytes: b})
		if f.name == "apples.arrow" || f.name == "types.arrow" {
			for i, option := range []ipc.Option{ipc.WithLZ4(), ipc.WithZstd()} {
				name := []string{"lz4_", "zstd_"}[i] + f.name
				all = append(all, base{name: name, label: f.label, bytes: packed(t, b, false, option)},
					base{name: name + "s", label: f.label, bytes: packed(t, b, true, option)})
			}
		}
	}
	for _, f := range []struct{ name, label string }{{"apples", "grade"}, {"plain", "label"}, {"grows", "label"}, {"types", "label"}} {
		all = append(all, base{name: f.name + ".parquet", label: f.label, bytes: read(t, "parquet/testdata/"+f.name+".parquet"), nested: f.name == "types"})
	}
	csv, lines := spelled()
	return append(all, base{name: "apples.csv", label: "grade", bytes: csv}, base{name: "apples.jsonl", label: "grade", bytes: lines})
}

func read(t testing.TB, path string) []byte {
	t.Helper()
	b, err := os.ReadFile(path)
	if err != nil {
		t.Fatal(err)
	}
	return b
}

// packed writes an Arrow file anew, compressed.
func packed(t testing.TB, b []byte, stream bool, option ipc.Option) []byte {
	t.Helper()
	r, err := ipc.NewFileReader(bytes.NewReader(b))
	if err != nil {
		t.Fatal(err)
	}
	defer r.Close()
	path := filepath.Join(t.TempDir(), "packed")
	out, err := os.Create(path)
	if err != nil {
		t.Fatal(err)
	}
	defer out.Close()
	var w interface {
		Write(arrow.Record) error
		Close() error
	} = ipc.NewWriter(out, ipc.WithSchema(r.Schema()), option)
	if !stream {
		if w, err = ipc.NewFileWriter(out, ipc.WithSchema(r.Schema()), option); err != nil {
			t.Fatal(err)
		}
	}
	for i := range r.NumRecords() {
		rec, err := r.Record(i)
		if err == nil {
			err = w.Write(rec)
		}
		if err != nil {
			t.Fatal(err)
		}
	}
	if err := w.Close(); err != nil {
		t.Fatal(err)
	}
	return read(t, path)
}

// spelled gives a packing line as CSV and as JSON lines, with all kinds of cells.
func spelled() (csv, lines []byte) {
	csv = []byte("apple_id,diameter_mm,cultivar,bruised,graded_at,note,grade\r\n")
	for i := range 120 {
		grade := []string{"first", "second", "cull"}[i*7%3]
		note := []string{"", "soft", "\"\"scab\"\", left", "leaf\non it", "größer"}[i%5]
		csv = fmt.Appendf(csv, "%d,%.1f,cultivar-%d,%t,2026-09-14T06:%02d:00Z,\"%s\",%s\r\n", i, 60+float64(i*13%29)/2, i%4, i%9 == 0, i%60, note, grade)
		lines = fmt.Appendf(lines, `{"apple_id":%d,"diameter_mm":%.1f,"cultivar":"cultivar-%d","bruised":%t,"spectrum":[0.5,%d,1e-3],"seen":{"at":"2026-09-14T06:%02d:00Z","by":[1,[2]]},"note":%q,"grade":"%s"}`+"\n",
			i, 60+float64(i*13%29)/2, i%4, i%9 == 0, i, i%60, note, grade)
	}
	return csv, lines
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

func (unsynced) SyncDir(string) error { return nil }

type unsyncedFile struct{ disk.File }

func (unsyncedFile) Sync() error { return nil }

// carry sends a file through a sink the way a sweep does: a first look, then all rows. unreadable takes rows of text
// that can't be read; nil: they are errors.
func carry(in, label, out string, unreadable func(table.Unreadable) error) (err error) {
	opt := table.DefaultOptions(formats()...)
	opt.Disk, opt.Unreadable, opt.MostRow = unsynced{}, unreadable, 1<<20
	files := []table.Input{{Path: in}}
	src, err := table.Open(files, filter.Record{Label: label}, opt)
	if err != nil {
		return err
	}
	defer src.Close()
	sink, err := table.Create(table.OutputPaths{Tagged: out}, src, opt)
	if err != nil {
		return err
	}
	defer func() { err = errors.Join(err, sink.Close()) }()
	for {
		b, err := src.Next(context.Background())
		if err == io.EOF {
			return sink.Commit(context.Background())
		}
		if err != nil {
			return err
		}
		tags := make([]filter.Tag, b.Rows())
		for i := range tags {
			tags[i] = filter.Tag{Score: 0.25, Implied: "good", Snapshot: "0123456789ab", Reason: model.Scored}
		}
		err = sink.Deliver(context.Background(), b, tags)
		b.Release()
		if err != nil {
			return err
		}
	}
}

// reread reads a tagged file to its end. A column of numbers whose cells were text may have become text, so all that
// counts is that it can be read.
func reread(path, label string) error {
	opt := table.DefaultOptions(formats()...)
	src, err := table.Open([]table.Input{{Path: path}}, filter.Record{Label: label}, opt)
	if errors.Is(err, table.ErrColumn) { // tags of a file that has nothing else to learn from
		return nil
	}
	if err != nil {
		return err
	}
	defer src.Close()
	for {
		b, err := src.Next(context.Background())
		if err == io.EOF {
			return nil
		}
		if err != nil {
			return err
		}
		b.Release()
	}
}
