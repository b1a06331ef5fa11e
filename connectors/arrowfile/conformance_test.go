package arrowfile

import (
	"errors"
	"io/fs"
	"math"
	"os"
	"path/filepath"
	"slices"
	"testing"

	"github.com/apache/arrow/go/v16/arrow"
	"github.com/apache/arrow/go/v16/arrow/array"
	"github.com/apache/arrow/go/v16/arrow/ipc"

	"labelweir/connectors/table"
	"labelweir/filter"
	"labelweir/filter/filtertest"
	"labelweir/model"
)

func TestSourceConforms(t *testing.T) {
	for _, name := range []string{"apples.arrow", "apples.arrows"} {
		t.Run(name, func(t *testing.T) {
			opt := counted(t)
			filtertest.Source(t, func() (filter.Source, error) { return Open("testdata/"+name, appleRecord, opt) })
		})
	}
}

func TestSinkConforms(t *testing.T) {
	for _, name := range []string{"apples.arrow", "apples.arrows"} {
		t.Run(name, func(t *testing.T) {
			opt := counted(t)
			var out table.OutputPaths
			filtertest.Sink(t, filtertest.SinkCase{
				Open: func() (filter.Source, error) { return Open("testdata/"+name, appleRecord, opt) },
				Create: func() (filter.Sink, error) {
					out = outIn(t, filepath.Ext(name))
					src, err := Open("testdata/"+name, appleRecord, opt)
					if err != nil {
						return nil, err
					}
					defer src.Close() // the sink needs no more than what was there to be known at once
					return table.Create(out, src, opt)
				},
				Read: func() (tagged, held []filtertest.Tagged, there bool, err error) {
					tagged, errA := readTags(out.Tagged)
					held, errB := readTags(out.Quarantine)
					if errors.Is(errA, fs.ErrNotExist) && errors.Is(errB, fs.ErrNotExist) {
						return nil, nil, false, nil
					}
					return tagged, held, true, errors.Join(errA, errB)
				},
				Leftover: func() string {
					var left string
					for _, f := range must(os.ReadDir(filepath.Dir(out.Tagged))) {
						if path := filepath.Join(filepath.Dir(out.Tagged), f.Name()); path != out.Tagged && path != out.Quarantine {
							left += f.Name() + " "
						}
					}
					return left
				},
			})
		})
	}
}

func must[T any](v T, err error) T {
	if err != nil {
		panic(err)
	}
	return v
}

// readTags reads with arrow/go's own reader the rows, by their apple_id, and the tags.
func readTags(path string) (rows []filtertest.Tagged, err error) {
	f, err := os.Open(path)
	if err != nil {
		return nil, err
	}
	defer f.Close()
	if filepath.Ext(path) == ".arrow" {
		r, err := ipc.NewFileReader(f)
		if err != nil {
			return nil, err
		}
		defer r.Close()
		for i := range r.NumRecords() {
			rows = appendTags(rows, must(r.Record(i)))
		}
		return rows, nil
	}
	r, err := ipc.NewReader(f)
	if err != nil {
		return nil, err
	}
	defer r.Release()
	for r.Next() {
		rows = appendTags(rows, r.Record())
	}
	return rows, r.Err()
}

func appendTags(rows []filtertest.Tagged, rec arrow.Record) []filtertest.Tagged {
	col := func(name string) arrow.Array { return rec.Column(rec.Schema().FieldIndices(name)[0]) }
	number := func(name string, i int) float64 {
		if col(name).IsNull(i) {
			return math.NaN()
		}
		return col(name).(*array.Float64).Value(i)
	}
	text := func(name string, i int) string {
		if col(name).IsNull(i) {
			return ""
		}
		return col(name).ValueStr(i)
	}
	verdicts, reasons := []string{}, []string{}
	for v := filter.Pass; v <= filter.Unscored; v++ {
		verdicts = append(verdicts, v.String())
	}
	for r := model.Scored; r <= model.InputsChanged; r++ {
		reasons = append(reasons, r.String())
	}
	for i := range int(rec.NumRows()) {
		rows = append(rows, filtertest.Tagged{Row: col("apple_id").(*array.Int64).Value(i) - 1000, Tag: filter.Tag{
			Score: number("weir_score", i), Margin: number("weir_margin", i), Implied: text("weir_implied", i), Snapshot: text("weir_snapshot", i),
			Verdict: filter.Verdict(slices.Index(verdicts, text("weir_verdict", i))),
			Reason:  model.Reason(slices.Index(reasons, text("weir_reason", i)))}})
	}
	return rows
}
