package parquet

import (
	"bytes"
	"os"
	"path/filepath"
	"testing"

	"github.com/apache/arrow/go/v16/arrow"

	"labelweir/connectors/table"
)

// FuzzOpen reads any bytes as a file; what can be read must be of the schema's types and of one length.
func FuzzOpen(f *testing.F) {
	for _, pattern := range []string{"testdata/*.parquet", "../testdata/damaged/*.parquet"} {
		files, err := filepath.Glob(pattern)
		if err != nil || len(files) == 0 {
			f.Fatalf("no seeds: %v", err)
		}
		for _, name := range files {
			b, err := os.ReadFile(name)
			if err != nil {
				f.Fatal(err)
			}
			f.Add(b)
		}
	}
	f.Fuzz(func(t *testing.T, b []byte) {
		opt := table.DefaultOptions()
		r, err := newReader(table.File{ReaderAt: bytes.NewReader(b), Path: "fuzzed", Size: int64(len(b))},
			table.ReadOptions{Rows: 100, Peek: 100, MostRow: opt.MostRow, Memory: opt.Memory})
		if err != nil {
			return
		}
		defer r.Close()
		for _, field := range r.Schema().Fields() {
			if isNested(field.Type) {
				t.Skip("arrow/go reads it in goroutines of its own, whose panics only another process outlives")
			}
		}
		for {
			rec, err := r.Next()
			if err != nil {
				return // io.EOF too
			}
			for i, col := range rec.Columns() {
				if int64(col.Len()) != rec.NumRows() || !arrow.TypeEqual(col.DataType(), r.Schema().Field(i).Type) {
					t.Errorf("column %d has %d values of type %s in a batch of %d rows", i, col.Len(), col.DataType(), rec.NumRows())
				}
			}
			rec.Release()
		}
	})
}

// isNested tells whether a type has a struct in it.
func isNested(dt arrow.DataType) bool {
	if dt.ID() == arrow.STRUCT {
		return true
	}
	if nested, ok := dt.(arrow.NestedType); ok {
		for _, f := range nested.Fields() {
			if isNested(f.Type) {
				return true
			}
		}
	}
	return false
}
