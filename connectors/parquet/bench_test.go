package parquet

import (
	"context"
	"fmt"
	"io"
	"math/rand/v2"
	"os"
	"path/filepath"
	"testing"

	"github.com/apache/arrow/go/v16/arrow"
	"github.com/apache/arrow/go/v16/arrow/array"
	"github.com/apache/arrow/go/v16/arrow/memory"
	"github.com/apache/arrow/go/v16/parquet"
	"github.com/apache/arrow/go/v16/parquet/compress"
	"github.com/apache/arrow/go/v16/parquet/file"
	"github.com/apache/arrow/go/v16/parquet/pqarrow"

	"labelweir/connectors/table"
	"labelweir/filter"
)

const benchRows, benchCols, benchGroup = 500_000, 20, 1 << 17

// wideFile writes 20 float32 columns and a label of three classes.
func wideFile(b *testing.B) string {
	b.Helper()
	fields := []arrow.Field{{Name: "grade", Type: arrow.BinaryTypes.String}}
	for i := range benchCols {
		fields = append(fields, arrow.Field{Name: fmt.Sprint("f", i), Type: arrow.PrimitiveTypes.Float32})
	}
	schema := arrow.NewSchema(fields, nil)
	path := filepath.Join(b.TempDir(), "wide.parquet")
	f := must(os.Create(path))
	defer f.Close()
	props := parquet.NewWriterProperties(parquet.WithCompression(compress.Codecs.Snappy), parquet.WithDictionaryDefault(false), parquet.WithDictionaryFor("grade", true))
	w := must(pqarrow.NewFileWriter(schema, f, props, pqarrow.DefaultWriterProps()))
	r := rand.New(rand.NewPCG(1, 2))
	for lo := 0; lo < benchRows; lo += benchGroup {
		n := min(benchGroup, benchRows-lo)
		grades := array.NewStringBuilder(memory.DefaultAllocator)
		for range n {
			grades.Append([]string{"extra", "first", "juice"}[r.IntN(3)])
		}
		cols := []arrow.Array{grades.NewArray()}
		for range benchCols {
			v := array.NewFloat32Builder(memory.DefaultAllocator)
			for range n {
				v.Append(r.Float32())
			}
			cols = append(cols, v.NewArray())
		}
		if err := w.Write(array.NewRecord(schema, cols, int64(n))); err != nil {
			b.Fatal(err)
		}
	}
	if err := w.Close(); err != nil {
		b.Fatal(err)
	}
	return path
}

func must[T any](v T, err error) T {
	if err != nil {
		panic(err)
	}
	return v
}

func perRow(b *testing.B) {
	b.ReportMetric(float64(b.Elapsed().Nanoseconds())/float64(b.N)/benchRows, "ns/row")
	b.ReportMetric(benchRows*float64(b.N)/b.Elapsed().Seconds(), "rows/s")
}

// BenchmarkCopy is Source to Sink, tags and all.
func BenchmarkCopy(b *testing.B) {
	path := wideFile(b)
	out := table.OutputPaths{Tagged: filepath.Join(b.TempDir(), "out.parquet")}
	tags := make([]filter.Tag, 4096)
	for i := range tags {
		tags[i] = filter.Tag{Score: float64(i) / 4096, Margin: 1, Implied: "first", Snapshot: "0123456789ab"}
	}
	b.ReportAllocs()
	for b.Loop() {
		src := must(table.Open([]table.Input{{Path: path}}, filter.Record{Label: "grade"}, options()))
		sink := must(table.Create(out, src, options()))
		for {
			batch, err := src.Next(context.Background())
			if err == io.EOF {
				break
			}
			if err := sink.Deliver(context.Background(), batch, tags[:batch.Rows()]); err != nil {
				b.Fatal(err)
			}
			batch.Release()
		}
		if err := sink.Commit(context.Background()); err != nil {
			b.Fatal(err)
		}
		sink.Close()
		src.Close()
	}
	perRow(b)
}

// BenchmarkBareCopy reads and writes the row groups with pqarrow alone: no columns are looked at, none are added.
func BenchmarkBareCopy(b *testing.B) {
	path := wideFile(b)
	out := filepath.Join(b.TempDir(), "out.parquet")
	b.ReportAllocs()
	for b.Loop() {
		in, to := must(os.Open(path)), must(os.Create(out))
		pf := must(file.NewParquetReader(in))
		fr := must(pqarrow.NewFileReader(pf, pqarrow.ArrowReadProperties{BatchSize: 1 << 14}, memory.DefaultAllocator))
		rr := must(fr.GetRecordReader(context.Background(), nil, nil))
		props := parquet.NewWriterProperties(parquet.WithCompression(compress.Codecs.Snappy), parquet.WithDictionaryDefault(false), parquet.WithDictionaryFor("grade", true),
			parquet.WithMaxRowGroupLength(benchGroup))
		w := must(pqarrow.NewFileWriter(rr.Schema(), to, props, pqarrow.DefaultWriterProps()))
		for rr.Next() {
			if err := w.WriteBuffered(rr.Record()); err != nil {
				b.Fatal(err)
			}
		}
		if err := w.Close(); err != nil {
			b.Fatal(err)
		}
		rr.Release()
		in.Close()
		to.Close()
	}
	perRow(b)
}
