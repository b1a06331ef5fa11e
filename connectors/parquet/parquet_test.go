package parquet

import (
	"context"
	"errors"
	"io"
	"path/filepath"
	"strings"
	"testing"

	"labelweir/connectors/table"
	"labelweir/filter"
	"labelweir/filter/filtertest"
)

// labels of the files in testdata and in that of arrowfile.
var labels = map[string]string{"apples": "grade", "no_rows": "grade", "types": "label", "plain": "label", "grows": "label"}

// Apache's own Python reader (C++ underneath) and pandas tell whether all is as it was.
func TestPyarrowReadsWhatIsWritten(t *testing.T) {
	dir := t.TempDir()
	var jobs []string
	for _, x := range []struct{ in, out string }{
		{"testdata/apples.parquet", ".parquet"}, {"testdata/types.parquet", ".parquet"}, {"testdata/no_rows.parquet", ".parquet"},
		{"testdata/plain.parquet", ".parquet"}, {"testdata/grows.parquet", ".parquet"},
		{"testdata/apples.parquet", ".arrows"}, {"testdata/types.parquet", ".arrows"}, {"testdata/plain.parquet", ".arrow"},
		{"testdata/grows.parquet", ".arrows"}, {"testdata/grows.parquet", ".arrow"}, {"../arrowfile/testdata/replaced.arrows", ".arrow"}, {"../arrowfile/testdata/apples.arrow", ".parquet"},
		{"../arrowfile/testdata/replaced.arrows", ".parquet"}, {"../arrowfile/testdata/grows.arrow", ".parquet"},
	} {
		name := filepath.Base(x.in)
		label := "label"
		if l, ok := labels[strings.TrimSuffix(name, filepath.Ext(name))]; ok {
			label = l
		}
		for _, rows := range []int{7, 0} {
			t.Run(name+x.out, func(t *testing.T) {
				opt := options()
				opt.Rows = rows
				if x.out == ".arrow" { // a stream may have that name, too
					opt.OutFormat = "arrow"
				}
				out := filepath.Join(dir, name+strings.Repeat("x", rows)+x.out)
				if err := carry(x.in, out, filter.Record{Label: label}, opt); err != nil {
					t.Fatal(err)
				}
				jobs = append(jobs, x.in, out)
			})
		}
	}
	if diff := python(t, "compare.py", jobs...); diff != "" {
		t.Error(diff)
	}
}

func TestSourceConforms(t *testing.T) {
	opt := options()
	filtertest.Source(t, func() (filter.Source, error) {
		return table.Open([]table.Input{{Path: "testdata/apples.parquet"}}, filter.Record{Label: "grade", Source: "grader", Time: "graded_at"}, opt)
	})
}

// A Parquet file and the Arrow file it was made from give the same batches.
func TestValuesAreThoseOfTheArrowFile(t *testing.T) {
	rec := filter.Record{Label: "grade", Source: "grader", Time: "graded_at"}
	all := func(path string) (labels []int32, classes []string, numbers []float64, times []int64) {
		src, err := table.Open([]table.Input{{Path: path}}, rec, options())
		if err != nil {
			t.Fatal(err)
		}
		defer src.Close()
		for {
			b, err := src.Next(context.Background())
			if err == io.EOF {
				return
			}
			if err != nil {
				t.Fatal(err)
			}
			labels, classes, times = append(labels, b.Table.Labels...), b.Table.Classes, append(times, b.Times...)
			for _, c := range b.Table.Columns {
				for _, v := range c.Values {
					if v == v {
						numbers = append(numbers, v)
					}
				}
			}
			b.Release()
		}
	}
	l1, c1, n1, t1 := all("testdata/apples.parquet")
	l2, c2, n2, t2 := all("../arrowfile/testdata/apples.arrow")
	sum := func(v []float64) (s float64) {
		for _, x := range v {
			s += x
		}
		return s
	}
	if len(l1) != 100 || !equal(l1, l2) || !equal(c1, c2) || !equal(t1, t2) || len(n1) != len(n2) || sum(n1)-sum(n2) > 1e-9 || sum(n2)-sum(n1) > 1e-9 {
		t.Errorf("the values differ: %d and %d labels, %v and %v, %d and %d numbers", len(l1), len(l2), c1, c2, len(n1), len(n2))
	}
}

func equal[T comparable](a, b []T) bool {
	if len(a) != len(b) {
		return false
	}
	for i := range a {
		if a[i] != b[i] {
			return false
		}
	}
	return true
}

func TestATypeThatParquetLacksIsNamed(t *testing.T) {
	err := carry("../arrowfile/testdata/unions.arrow", filepath.Join(t.TempDir(), "out.parquet"), filter.Record{Label: "label"}, options())
	var own *table.Error
	if !errors.As(err, &own) || !errors.Is(err, table.ErrColumn) || own.Column != "runs" || !strings.Contains(own.Path, "out.parquet") {
		t.Errorf("got %v", err)
	}
}
