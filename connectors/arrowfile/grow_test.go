package arrowfile

import (
	"errors"
	"io"
	"path/filepath"
	"strings"
	"testing"

	"github.com/apache/arrow/go/v16/arrow"
	"github.com/apache/arrow/go/v16/arrow/array"
	"github.com/apache/arrow/go/v16/arrow/memory"

	"labelweir/connectors/table"
	"labelweir/filter"
)

// The dictionaries of an Arrow file may grow, but not change; those of two files are two.
func TestFilesOfOtherDictionariesBecomeOneArrowFile(t *testing.T) {
	dir := t.TempDir()
	dt := &arrow.DictionaryType{IndexType: arrow.PrimitiveTypes.Int8, ValueType: arrow.BinaryTypes.String}
	files := []table.Input{{Path: oneColumn(t, dir, "1.arrow", dt, `["a", "b", "c"]`)}, {Path: oneColumn(t, dir, "2.arrow", dt, `["d", "a"]`)},
		{Path: oneColumn(t, dir, "3.arrow", dt, `["a", "b", "c"]`)}}
	opt := counted(t)
	opt.Formats = Formats()
	src := must(table.Open(files, filter.Record{Label: "label"}, opt))
	out := table.OutputPaths{Tagged: filepath.Join(dir, "out.arrow")}
	copyFile(t, src, out, opt, func(int64) filter.Tag { return filter.Tag{} })
	if err := src.Close(); err != nil {
		t.Fatal(err)
	}
	again := open(t, out.Tagged, filter.Record{Label: "label"}, counted(t))
	var got []string
	each(t, again, func(b *filter.Batch) {
		for _, code := range b.Table.Labels {
			got = append(got, strings.TrimLeft(nameOf(code, b.Table.Classes), "0123456789:"))
		}
	})
	if s := strings.Join(got, " "); s != "none b a b none a d a none b a b" {
		t.Errorf("got labels %s", s)
	}
}

func TestADictionaryThatOutgrowsItsIndicesIsAnError(t *testing.T) {
	dt := &arrow.DictionaryType{IndexType: arrow.PrimitiveTypes.Int8, ValueType: arrow.PrimitiveTypes.Int64}
	schema := arrow.NewSchema([]arrow.Field{{Name: "crate", Type: dt}}, nil)
	w := newWriter(io.Discard, File, schema, table.WriteOptions{Memory: memory.DefaultAllocator})
	defer w.Close()
	var err error
	for k := range 3 {
		values, codes := array.NewInt64Builder(memory.DefaultAllocator), array.NewInt8Builder(memory.DefaultAllocator)
		for i := range 50 {
			values.Append(int64(50*k + i))
		}
		codes.Append(49)
		col := array.NewDictionaryArray(dt, codes.NewArray(), values.NewArray())
		if err = w.Write(array.NewRecord(schema, []arrow.Array{col}, 1)); err != nil && k < 2 {
			t.Fatal(err)
		}
	}
	var own *table.Error
	if !errors.As(err, &own) || own.Column != "crate" || !strings.Contains(err.Error(), "150 values") {
		t.Errorf("got %v", err)
	}
}
