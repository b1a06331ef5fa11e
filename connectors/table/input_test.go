package table_test

import (
	"bytes"
	"context"
	"errors"
	"fmt"
	"io"
	"io/fs"
	"os"
	"path/filepath"
	"strings"
	"testing"

	"github.com/apache/arrow/go/v16/arrow"
	"github.com/apache/arrow/go/v16/arrow/ipc"

	"labelweir/connectors/table"
	"labelweir/filter"
)

// put writes a file of text.
func put(t *testing.T, path, text string) string {
	t.Helper()
	if err := os.WriteFile(path, []byte(text), 0o644); err != nil {
		t.Fatal(err)
	}
	return path
}

// rowsOf reads all rows of files: key, label and the only number of each.
func rowsOf(t *testing.T, files []table.Input, opt table.Options) (rows []string, err error) {
	t.Helper()
	src, err := table.Open(files, filter.Record{Label: "label", Fields: []filter.Field{{Path: "x"}}}, opt)
	if err != nil {
		return nil, err
	}
	defer src.Close()
	for {
		b, err := src.Next(context.Background())
		if err == io.EOF {
			done, size := src.Progress()
			if done != size {
				t.Errorf("at the end %d of %d bytes are done", done, size)
			}
			return rows, nil
		}
		if err != nil {
			return rows, err
		}
		for i := range b.Rows() {
			rows = append(rows, fmt.Sprintf("%x %s %v", b.Table.Keys[i], b.Table.Classes[b.Table.Labels[i]], b.Table.Columns[0].Values[i]))
		}
		b.Release()
	}
}

func TestSeveralFilesAreReadAsOne(t *testing.T) {
	dir := t.TempDir()
	whole := put(t, filepath.Join(dir, "whole.csv"), "x,label\n1,a\n2,b\n3,c\n4,a\n")
	parts := []table.Input{{Path: put(t, filepath.Join(dir, "1.csv"), "x,label\n1,a\n2,b\n")}, {Path: put(t, filepath.Join(dir, "2.csv"), "x,label\n")},
		{Path: put(t, filepath.Join(dir, "3.csv"), "x,label\n3,c\n4,a\n")}}
	want, err := rowsOf(t, []table.Input{{Path: whole}}, options())
	if err != nil || len(want) != 4 {
		t.Fatalf("got %v, %v", want, err)
	}
	got, err := rowsOf(t, parts, options())
	if err != nil || strings.Join(got, "\n") != strings.Join(want, "\n") {
		t.Errorf("got %v, %v, want %v", got, err, want)
	}
	file, err := os.Open(whole)
	if err != nil {
		t.Fatal(err)
	}
	defer file.Close()
	opt := options()
	opt.InFormat = "csv"
	for range 2 { // an open file stays open, and is read from its beginning each time
		got, err = rowsOf(t, []table.Input{{Path: "-", Title: "standard input", File: file}}, opt)
		if err != nil || strings.Join(got, "\n") != strings.Join(want, "\n") {
			t.Errorf("got %v, %v, want %v", got, err, want)
		}
	}
}

func TestFilesOfOtherColumnsAreNamed(t *testing.T) {
	dir := t.TempDir()
	first := table.Input{Path: put(t, filepath.Join(dir, "1.csv"), "x,label\n1,a\n2,b\n")}
	for _, x := range []struct{ text, column, what string }{
		{"y,label\n1,a\n", "y", "stands where"},
		{"x,label,z\n1,a,2\n", "z", "is not in"},
		{"x\n1\n", "label", "but not here"},
	} {
		second := table.Input{Path: put(t, filepath.Join(dir, "2.csv"), x.text), Title: "the second"}
		_, err := rowsOf(t, []table.Input{first, second}, options())
		var own *table.Error
		if !errors.As(err, &own) || !errors.Is(err, table.ErrColumn) || own.Path != "the second" || own.Column != x.column || !strings.Contains(own.What, x.what) {
			t.Errorf("%q: got %v", x.text, err)
		}
	}
	_, err := rowsOf(t, []table.Input{first, {Path: filepath.Join(dir, "none.csv")}}, options())
	if !errors.Is(err, fs.ErrNotExist) {
		t.Errorf("a missing second file: got %v", err)
	}
}

// The first rows are numbers, one of the last is not: in another format the column stays text, and nothing is lost.
func TestCellsBecomeValuesOnlyWhenAllDo(t *testing.T) {
	dir := t.TempDir()
	rows := "x,late,label\n" + strings.Repeat("1,2026-05-01,a\n2.5,2026-05-02,b\n", 10) + "3,soon,a\n"
	in, out := put(t, filepath.Join(dir, "in.csv"), rows), filepath.Join(dir, "out.arrows")
	opt := options()
	opt.Peek = 10
	if err := carry(in, out, opt); err != nil {
		t.Fatal(err)
	}
	f, err := os.Open(out)
	if err != nil {
		t.Fatal(err)
	}
	defer f.Close()
	r, err := ipc.NewReader(f)
	if err != nil {
		t.Fatal(err)
	}
	defer r.Release()
	var types []string
	for _, f := range r.Schema().Fields()[:3] {
		types = append(types, f.Type.String())
	}
	if got := strings.Join(types, " "); got != "float64 utf8 utf8" {
		t.Errorf("got types %s", got)
	}
	if !r.Next() || r.Record().Column(1).ValueStr(20) != "soon" || r.Record().Column(0).ValueStr(1) != "2.5" || r.Record().Schema().Field(0).Type != arrow.PrimitiveTypes.Float64 {
		t.Error("the values changed")
	}
}

// A crate's number has zeros in front, a phone number a plus, an identifier more digits than a number holds: behind the
// rows that were looked at first, too, they stay text in another format.
func TestCodesBehindTheFirstRowsStayText(t *testing.T) {
	dir := t.TempDir()
	rows := "x,crate,phone,serial,share,label\n" + strings.Repeat("1,12,49171,5,0.5,a\n2.5,13,49172,6.5,1.50,b\n", 10) + "3,007,+49173,12345678901234567890,0.70,a\n"
	in, out := put(t, filepath.Join(dir, "in.csv"), rows), filepath.Join(dir, "out.arrows")
	opt := options()
	opt.Peek = 10
	if err := carry(in, out, opt); err != nil {
		t.Fatal(err)
	}
	f, err := os.Open(out)
	if err != nil {
		t.Fatal(err)
	}
	defer f.Close()
	r, err := ipc.NewReader(f)
	if err != nil {
		t.Fatal(err)
	}
	defer r.Release()
	if !r.Next() {
		t.Fatal("no rows")
	}
	var got []string
	for i, f := range r.Schema().Fields()[:5] {
		got = append(got, f.Type.String()+" "+r.Record().Column(i).ValueStr(20))
	}
	if s, want := strings.Join(got, ", "), "float64 3, utf8 007, utf8 +49173, utf8 12345678901234567890, float64 0.7"; s != want {
		t.Errorf("got %s, want %s", s, want)
	}
}

func TestTabbedFilesOfAnotherFormatHaveTabs(t *testing.T) {
	dir := t.TempDir()
	in, out := put(t, filepath.Join(dir, "in.jsonl"), `{"x":1,"label":"a"}`+"\n"), filepath.Join(dir, "out.tsv")
	if err := carry(in, out, options()); err != nil {
		t.Fatal(err)
	}
	b, err := os.ReadFile(out)
	if s := string(b); err != nil || !strings.HasPrefix(s, "x\tlabel\tweir_score") || !strings.Contains(s, "\n1\ta\t") || strings.Contains(s, ",") {
		t.Errorf("got %q, %v", b, err)
	}
}

func TestOutputsGoIntoAPipe(t *testing.T) {
	in := put(t, filepath.Join(t.TempDir(), "in.csv"), "x,label\n1,a\n2,b\n")
	var pipe bytes.Buffer
	opt := options()
	opt.Pipe = &pipe
	if err := carry(in, table.Pipe, opt); err != nil {
		t.Fatal(err)
	}
	if got := pipe.String(); !strings.HasPrefix(got, "x,label,weir_score") || strings.Count(got, "\n") != 3 {
		t.Errorf("got %q", got)
	}
	opt.OutFormat = "parquet"
	if err := carry(in, table.Pipe, opt); !errors.Is(err, table.ErrTarget) {
		t.Errorf("Parquet into a pipe: got %v", err)
	}
	opt = options()
	if err := carry(in, table.Pipe, opt); !errors.Is(err, table.ErrTarget) {
		t.Errorf("no pipe: got %v", err)
	}
	opt.Pipe = failing{}
	if err := carry(in, table.Pipe, opt); !errors.Is(err, table.ErrWrite) || !errors.Is(err, io.ErrClosedPipe) {
		t.Errorf("a pipe that nobody reads: got %v", err)
	}
}

type failing struct{}

func (failing) Write([]byte) (int, error) { return 0, io.ErrClosedPipe }

func TestRowsThatCannotBeReadAreHandedOnInOrder(t *testing.T) {
	dir := t.TempDir()
	files := []table.Input{{Path: put(t, filepath.Join(dir, "1.csv"), "x,label\n1,a\n2\n3,b\n")}, {Path: put(t, filepath.Join(dir, "2.csv"), "x,label\n1,a,b\n2,b\n")}}
	if _, err := rowsOf(t, files, options()); !errors.Is(err, table.ErrUnreadable) || !strings.Contains(err.Error(), "line 3") {
		t.Errorf("without a taker: got %v", err)
	}
	var took []string
	opt := options()
	opt.Unreadable = func(u table.Unreadable) error {
		took = append(took, fmt.Sprintf("%s:%d:%d %s", filepath.Base(u.File), u.Line, u.Byte, u.Bytes))
		return nil
	}
	rows, err := rowsOf(t, files, opt)
	if err != nil || len(rows) != 3 {
		t.Errorf("got %v, %v", rows, err)
	}
	if got := strings.Join(took, ", "); got != "1.csv:3:12 2, 2.csv:2:8 1,a,b" {
		t.Errorf("got %s", got)
	}
}
