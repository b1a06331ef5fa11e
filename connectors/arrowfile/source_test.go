package arrowfile

import (
	"context"
	"errors"
	"fmt"
	"io"
	"strings"
	"testing"

	"labelweir/connectors/table"
	"labelweir/filter"
	"labelweir/model"
)

// The expected rows are what make.py put in, looked up with pyarrow.
func TestFilesOfPyarrowAreRead(t *testing.T) {
	for _, name := range []string{"apples.arrow", "apples.arrows", "apples_v4.arrow", "apples_v4.arrows"} {
		t.Run(name, func(t *testing.T) {
			rows := allRows(t, open(t, "testdata/"+name, appleRecord, counted(t)))
			if len(rows) != 100 {
				t.Fatalf("got %d rows, want 100", len(rows))
			}
			golden(t, "apples.rows", strings.Join(rows, "\n")+"\n")
		})
	}
}

func TestChoiceSaysWhatBecomesOfEachColumn(t *testing.T) {
	var b strings.Builder
	for _, x := range []struct {
		file  string
		label string
	}{{"apples.arrow", "grade"}, {"types.arrow", "label"}, {"unions.arrow", "label"}, {"grows.arrows", "label"}} {
		src := open(t, "testdata/"+x.file, filter.Record{Label: x.label}, counted(t))
		fmt.Fprintln(&b, x.file)
		for _, c := range src.Choice() {
			kind := "-"
			if c.Used {
				kind = c.Kind.String()
			}
			fmt.Fprintf(&b, "  %-14s %-9s %-45s %s\n", c.Column, kind, c.Type, c.Why)
		}
	}
	golden(t, "choice.txt", b.String())
}

func TestEveryTypeIsReadAsItsKind(t *testing.T) {
	for _, name := range []string{"types.arrow", "types.arrows"} {
		rows := allRows(t, open(t, "testdata/"+name, filter.Record{Label: "label"}, counted(t)))
		golden(t, "types.rows", strings.Join(rows, "\n")+"\n")
	}
}

func TestRecordOfASourceOpensTheSameColumns(t *testing.T) {
	first := open(t, "testdata/apples.arrow", appleRecord, counted(t))
	rec := first.Record()
	if len(rec.Fields) != 6 || rec.Fields[5] != (filter.Field{Path: "spectrum", Kind: model.Vector, Size: 3}) {
		t.Fatalf("got fields %+v", rec.Fields)
	}
	second := open(t, "testdata/apples.arrow", rec, counted(t))
	got, want := allRows(t, second), allRows(t, first)
	if strings.Join(got, "\n") != strings.Join(want, "\n") {
		t.Error("the second reading differs from the first")
	}
}

func TestFieldsReadInTheirOrderAndKind(t *testing.T) {
	fields := []filter.Field{{Path: "spots", Kind: model.Category}, {Path: "blush"}, {Path: "bruised", Kind: model.Category}}
	rec := filter.Record{Label: "grade", Fields: fields}
	src := open(t, "testdata/apples.arrow", rec, counted(t))
	if fields[1].Kind != 0 {
		t.Error("the caller's fields were changed")
	}
	b, err := src.Next(context.Background())
	if err != nil {
		t.Fatal(err)
	}
	defer b.Release()
	var got []string
	for _, c := range b.Table.Columns {
		got = append(got, fmt.Sprintf("%s %s", c.Name, c.Kind))
	}
	if s := strings.Join(got, ", "); s != "spots category, blush number, bruised category" {
		t.Errorf("got %s", s)
	}
	if c := b.Table.Columns[2]; strings.Join(c.Levels, " ") != "false true" {
		t.Errorf("got levels %v", c.Levels)
	}
	if b.Table.Sources != nil || b.Times != nil {
		t.Error("sources or times without being asked for")
	}
}

func TestRepeatedNamesAreToldApart(t *testing.T) {
	rec := filter.Record{Label: "mm#2", Fields: []filter.Field{{Path: "mm"}, {Path: "mm#3"}}}
	src := open(t, "testdata/twice.arrow", rec, counted(t))
	if rows := allRows(t, src); len(rows) != 100 || !strings.Contains(rows[1], "mm#3=") {
		t.Errorf("got %d rows, second %q", len(rows), rows[1])
	}
}

func TestListsGrowOnlyAtTheirEnd(t *testing.T) {
	src := open(t, "testdata/replaced.arrows", filter.Record{Label: "label"}, counted(t))
	var before []string
	each(t, src, func(b *filter.Batch) {
		now := b.Table.Classes
		if cap(now) != len(now) {
			t.Error("a consumer could append to the reader's list")
		}
		if len(now) < len(before) || strings.Join(now[:len(before)], " ") != strings.Join(before, " ") {
			t.Errorf("classes went from %v to %v", before, now)
		}
		before = now
	})
	if s := strings.Join(before, " "); s != "Lred Lgreen Lstripe" {
		t.Errorf("got classes %s", s)
	}
}

func TestLargeRecordBatchesAreCut(t *testing.T) {
	opt := counted(t)
	opt.Rows = 9
	var sizes []int
	each(t, open(t, "testdata/apples.arrow", appleRecord, opt), func(b *filter.Batch) { sizes = append(sizes, b.Rows()) })
	if s := fmt.Sprint(sizes); s != "[9 9 9 9 4 9 9 9 9 4 9 9 2]" {
		t.Errorf("got batches of %s rows", s)
	}
}

func TestBatchesOutliveTheSource(t *testing.T) {
	src := open(t, "testdata/apples.arrow", appleRecord, counted(t))
	b, err := src.Next(context.Background())
	if err != nil {
		t.Fatal(err)
	}
	before := strings.Join(rowsOf(b), "\n")
	if err := src.Close(); err != nil {
		t.Fatal(err)
	}
	if after := strings.Join(rowsOf(b), "\n"); after != before {
		t.Error("the batch changed when the source was closed")
	}
	b.Release()
	b.Release() // harmless
	if _, err := src.Next(context.Background()); !errors.Is(err, table.ErrClosed) {
		t.Errorf("got %v from a closed source", err)
	}
}

func TestNothingIsReadAfterTheContextEnds(t *testing.T) {
	ctx, cancel := context.WithCancel(context.Background())
	src := open(t, "testdata/apples.arrow", appleRecord, counted(t))
	cancel()
	if _, err := src.Next(ctx); err != context.Canceled {
		t.Errorf("got %v", err)
	}
	b, err := src.Next(context.Background())
	if err != nil {
		t.Fatalf("a cancelled call is not final, but the next gave %v", err)
	}
	b.Release()
}

func TestTablesWithoutRowsEndAtOnce(t *testing.T) {
	for _, name := range []string{"no_rows.arrow", "no_batches.arrow", "no_batches.arrows"} {
		src := open(t, "testdata/"+name, appleRecord, counted(t))
		for range 2 {
			if _, err := src.Next(context.Background()); err != io.EOF {
				t.Errorf("%s: got %v, want EOF", name, err)
			}
		}
	}
}

func TestProgressReachesTheEnd(t *testing.T) {
	for _, name := range []string{"apples.arrow", "apples.arrows"} {
		src := open(t, "testdata/"+name, appleRecord, counted(t))
		allRows(t, src)
		if done, size := src.Progress(); done <= size/3 || done > size {
			t.Errorf("%s: got %d of %d bytes", name, done, size)
		}
	}
}
