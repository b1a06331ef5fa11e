package arrowfile

import (
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
	"github.com/apache/arrow/go/v16/arrow/array"
	"github.com/apache/arrow/go/v16/arrow/ipc"
	"github.com/apache/arrow/go/v16/arrow/memory"

	"labelweir/connectors/table"
	"labelweir/filter"
	"labelweir/model"
)

// oneColumn writes a file with a number x and a label column made of JSON values.
func oneColumn(t *testing.T, dir, name string, dt arrow.DataType, label string) string {
	t.Helper()
	arr := fromJSON(t, dt, label)
	x := array.NewFloat64Builder(memory.DefaultAllocator)
	for i := range arr.Len() {
		x.Append(float64(i) / 2)
	}
	schema := arrow.NewSchema([]arrow.Field{{Name: "x", Type: arrow.PrimitiveTypes.Float64}, {Name: "label", Type: dt, Nullable: true}}, nil)
	rec := array.NewRecord(schema, []arrow.Array{x.NewArray(), arr}, int64(arr.Len()))
	path := filepath.Join(dir, name)
	f, err := os.Create(path)
	if err != nil {
		t.Fatal(err)
	}
	defer f.Close()
	w, err := ipc.NewFileWriter(f, ipc.WithSchema(schema))
	if err != nil {
		t.Fatal(err)
	}
	if err := errors.Join(w.Write(rec), w.Close()); err != nil {
		t.Fatal(err)
	}
	return path
}

// fromJSON makes an array; of a dictionary the first row is null and the others have index 0, 1 and 0.
func fromJSON(t *testing.T, dt arrow.DataType, text string) arrow.Array {
	t.Helper()
	d, ok := dt.(*arrow.DictionaryType)
	if ok {
		codes := array.NewInt8Builder(memory.DefaultAllocator)
		codes.AppendNull()
		codes.AppendValues([]int8{1, 0, 1}, nil)
		return array.NewDictionaryArray(dt, codes.NewArray(), fromJSON(t, d.ValueType, text))
	}
	arr, _, err := array.FromJSON(memory.DefaultAllocator, dt, strings.NewReader(text))
	if err != nil {
		t.Fatal(err)
	}
	return arr
}

// readWhole opens a file and reads it to its end.
func readWhole(path string, rec filter.Record, opt table.Options) error {
	src, err := Open(path, rec, opt)
	if err != nil {
		return err
	}
	defer src.Close()
	for {
		b, err := src.Next(context.Background())
		if err != nil {
			if err == io.EOF {
				return nil
			}
			return err
		}
		b.Release()
	}
}

func TestBadInputIsExplained(t *testing.T) {
	dir := t.TempDir()
	put := func(name, text string) string {
		path := filepath.Join(dir, name)
		if err := os.WriteFile(path, []byte(text), 0o644); err != nil {
			t.Fatal(err)
		}
		return path
	}
	apples := "testdata/apples.arrow"
	whole, err := os.ReadFile(apples)
	if err != nil {
		t.Fatal(err)
	}
	stream, err := os.ReadFile("testdata/apples.arrows")
	if err != nil {
		t.Fatal(err)
	}
	number := func(path string) []filter.Field { return []filter.Field{{Path: path, Kind: model.Number}} }
	var b strings.Builder
	for _, x := range []struct {
		about, path string
		rec         filter.Record
		kind        error
	}{
		{"missing file", filepath.Join(dir, "none.arrow"), appleRecord, table.ErrUnreadable},
		{"a folder", dir, appleRecord, table.ErrUnreadable},
		{"empty file", put("empty.arrow", ""), appleRecord, table.ErrUnreadable},
		{"text", put("table.csv", "grade,diameter\nextra,71\n"), appleRecord, table.ErrUnreadable},
		{"other bytes", put("photo.arrow", "\x89PNG\r\n\x1a\n0123456789"), appleRecord, table.ErrUnreadable},
		{"cut file", put("cut.arrow", string(whole[:len(whole)-2000])), appleRecord, table.ErrUnreadable},
		{"cut stream", put("cut.arrows", string(stream[:len(stream)-700])), appleRecord, table.ErrUnreadable},
		{"no label named", apples, filter.Record{}, table.ErrColumn},
		{"label missing, one like it", apples, filter.Record{Label: "Grades"}, table.ErrColumn},
		{"label missing, none like it", apples, filter.Record{Label: "weight"}, table.ErrColumn},
		{"source missing", apples, filter.Record{Label: "grade", Source: "graders"}, table.ErrColumn},
		{"time missing", apples, filter.Record{Label: "grade", Time: "graded"}, table.ErrColumn},
		{"field missing", apples, filter.Record{Label: "grade", Fields: number("diametre_mm")}, table.ErrColumn},
		{"field named twice", apples, filter.Record{Label: "grade", Fields: append(number("blush"), number("blush")...)}, table.ErrColumn},
		{"field is the label", apples, filter.Record{Label: "spots", Fields: number("spots")}, table.ErrColumn},
		{"field of another kind", apples, filter.Record{Label: "grade", Fields: number("cultivar")}, table.ErrColumn},
		{"vector of another size", apples, filter.Record{Label: "grade", Fields: []filter.Field{{Path: "spectrum", Kind: model.Vector, Size: 8}}}, table.ErrColumn},
		{"field of an unsupported type", "testdata/types.arrow", filter.Record{Label: "label", Fields: []filter.Field{{Path: "pair"}}}, table.ErrColumn},
		{"label is the source", apples, filter.Record{Label: "grade", Source: "grade"}, table.ErrColumn},
		{"label of an unsupported type", "testdata/types.arrow", filter.Record{Label: "list"}, table.ErrColumn},
		{"source of an unsupported type", "testdata/types.arrow", filter.Record{Label: "label", Source: "pair"}, table.ErrColumn},
		{"label column named twice", "testdata/twice.arrow", filter.Record{Label: "grade"}, table.ErrColumn},
		{"time of integers", apples, filter.Record{Label: "grade", Time: "apple_id"}, table.ErrColumn},
		{"time of text", "testdata/types.arrow", filter.Record{Label: "label", Time: "text"}, table.ErrColumn},
		{"fractional label", oneColumn(t, dir, "measured.arrow", arrow.PrimitiveTypes.Float32, "[1, 2, null, 2.5, 1]"), filter.Record{Label: "label"}, table.ErrUnreadable},
		{"no columns left", oneColumn(t, dir, "bare.arrow", arrow.BinaryTypes.String, `["a","b"]`), filter.Record{Label: "x", Source: "label"}, table.ErrColumn},
	} {
		err := readWhole(x.path, x.rec, counted(t))
		var own *table.Error
		if !errors.As(err, &own) || !errors.Is(err, x.kind) || own.Do == "" {
			t.Errorf("%s: got %v, want an Error of kind %q with advice", x.about, err, x.kind)
			continue
		}
		fmt.Fprintf(&b, "%s\n    %s\n", x.about, strings.ReplaceAll(err.Error(), dir, "DIR"))
	}
	golden(t, "faults.txt", b.String())
	if err := readWhole(filepath.Join(dir, "none.arrow"), appleRecord, table.Options{}); !errors.Is(err, fs.ErrNotExist) {
		t.Errorf("a missing file gives %v, which is not fs.ErrNotExist", err)
	}
}

func TestLabelsOfEveryTypeBecomeClasses(t *testing.T) {
	dict := func(v arrow.DataType) arrow.DataType {
		return &arrow.DictionaryType{IndexType: arrow.PrimitiveTypes.Int8, ValueType: v}
	}
	for _, x := range []struct {
		dt           arrow.DataType
		label, names string
	}{
		{arrow.PrimitiveTypes.Int8, "[null, 3, -1, 3]", "3 -1"},
		{arrow.PrimitiveTypes.Uint64, "[null, 5000000000, 0, 5000000000]", "5000000000 0"},
		{arrow.FixedWidthTypes.Boolean, "[null, true, false, true]", "true false"},
		{arrow.BinaryTypes.String, `[null, "b", "", "b"]`, "b "},
		{arrow.BinaryTypes.LargeString, `[null, "b", "a", "b"]`, "b a"},
		{arrow.PrimitiveTypes.Float64, "[null, 2, 0, 2]", "2 0"},
		{arrow.FixedWidthTypes.Float16, "[null, 2, 1, 2]", "2 1"},
		{dict(arrow.BinaryTypes.String), `["a", "b", "c"]`, "b a"},
		{dict(arrow.PrimitiveTypes.Int64), `[5, 7, 9]`, "7 5"},
		{dict(arrow.FixedWidthTypes.Boolean), `[false, true]`, "true false"},
		{dict(arrow.BinaryTypes.String), `[null, "b"]`, "b"},
	} {
		t.Run(x.dt.String(), func(t *testing.T) {
			path := oneColumn(t, t.TempDir(), "in.arrow", x.dt, x.label)
			src := open(t, path, filter.Record{Label: "label"}, counted(t))
			each(t, src, func(b *filter.Batch) {
				if got := strings.Join(b.Table.Classes, " "); got != x.names {
					t.Errorf("got classes %q, want %q", got, x.names)
				}
				want := "[-1 0 1 0]"
				if len(b.Table.Classes) == 1 {
					want = "[-1 0 -1 0]"
				}
				if got := fmt.Sprint(b.Table.Labels); got != want {
					t.Errorf("got labels %s, want %s", got, want)
				}
			})
		})
	}
}
