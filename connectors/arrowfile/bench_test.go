package arrowfile

import (
	"bufio"
	"context"
	"io"
	"math/rand/v2"
	"os"
	"path/filepath"
	"strconv"
	"testing"

	"github.com/apache/arrow/go/v16/arrow"
	"github.com/apache/arrow/go/v16/arrow/array"
	"github.com/apache/arrow/go/v16/arrow/ipc"
	"github.com/apache/arrow/go/v16/arrow/memory"

	"labelweir/connectors/table"
	"labelweir/filter"
)

const benchRows, benchCols, benchBatch = 1_000_000, 20, 65_536

// wideFile writes 20 float32 columns and a dictionary label of three classes.
func wideFile(b *testing.B) string {
	b.Helper()
	fields := []arrow.Field{{Name: "grade", Type: &arrow.DictionaryType{IndexType: arrow.PrimitiveTypes.Int8, ValueType: arrow.BinaryTypes.String}}}
	for i := range benchCols {
		fields = append(fields, arrow.Field{Name: "f" + strconv.Itoa(i), Type: arrow.PrimitiveTypes.Float32})
	}
	schema := arrow.NewSchema(fields, nil)
	path := filepath.Join(b.TempDir(), "wide.arrow")
	f, err := os.Create(path)
	if err != nil {
		b.Fatal(err)
	}
	defer f.Close()
	w, err := ipc.NewFileWriter(f, ipc.WithSchema(schema))
	if err != nil {
		b.Fatal(err)
	}
	r := rand.New(rand.NewPCG(1, 2))
	grades := array.NewStringBuilder(memory.DefaultAllocator)
	grades.AppendValues([]string{"extra", "first", "juice"}, nil)
	gradeNames := grades.NewArray()
	for lo := 0; lo < benchRows; lo += benchBatch {
		n := min(benchBatch, benchRows-lo)
		codes := array.NewInt8Builder(memory.DefaultAllocator)
		for range n {
			codes.Append(int8(r.IntN(3)))
		}
		cols := []arrow.Array{array.NewDictionaryArray(fields[0].Type, codes.NewArray(), gradeNames)}
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

func perRow(b *testing.B) {
	b.ReportMetric(float64(b.Elapsed().Nanoseconds())/float64(b.N)/benchRows, "ns/row")
	b.ReportMetric(benchRows*float64(b.N)/b.Elapsed().Seconds(), "rows/s")
}

// BenchmarkCopy is Source to Sink, tags and all, without waiting for the disk; observe has all rows in one file, divert
// holds back 5 % of them.
func BenchmarkCopy(b *testing.B) {
	path := wideFile(b)
	for _, mode := range []string{"observe", "divert"} {
		b.Run(mode, func(b *testing.B) {
			out := table.OutputPaths{Tagged: filepath.Join(b.TempDir(), "out.arrow")}
			r := rand.New(rand.NewPCG(3, 4))
			if mode == "divert" {
				out.Quarantine = filepath.Join(b.TempDir(), "held.arrow")
			}
			tag := filter.Tag{Score: 0.25, Margin: 1, Implied: "first", Snapshot: "0123456789ab"}
			tags := make([]filter.Tag, table.DefaultOptions().Rows)
			b.ReportAllocs()
			for b.Loop() {
				src := must(Open(path, filter.Record{Label: "grade"}, table.Options{}))
				sink := must(create(lazy{}, out, src, table.Options{Replace: true}))
				for {
					batch, err := src.Next(context.Background())
					if err == io.EOF {
						break
					}
					for i := range batch.Rows() {
						tags[i] = tag
						tags[i].Divert = out.Quarantine != "" && r.IntN(20) == 0
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
		})
	}
}

// BenchmarkRead is the source alone.
func BenchmarkRead(b *testing.B) {
	path := wideFile(b)
	b.ReportAllocs()
	for b.Loop() {
		src := must(Open(path, filter.Record{Label: "grade"}, table.Options{}))
		for {
			batch, err := src.Next(context.Background())
			if err == io.EOF {
				break
			}
			batch.Release()
		}
		src.Close()
	}
	perRow(b)
}

// BenchmarkBareCopy reads and writes the record batches with arrow/go alone: no columns are looked at, none are added.
func BenchmarkBareCopy(b *testing.B) {
	path := wideFile(b)
	out := filepath.Join(b.TempDir(), "out.arrow")
	b.ReportAllocs()
	for b.Loop() {
		in, file := must(os.Open(path)), must(os.Create(out))
		r := must(ipc.NewFileReader(in))
		buf := bufio.NewWriterSize(file, 1<<18)
		w := ipc.NewWriter(buf, ipc.WithSchema(r.Schema()))
		for i := range r.NumRecords() {
			rec := must(r.RecordAt(i))
			if err := w.Write(rec); err != nil {
				b.Fatal(err)
			}
			rec.Release()
		}
		w.Close()
		buf.Flush()
		file.Close()
		r.Close()
		in.Close()
	}
	perRow(b)
}
