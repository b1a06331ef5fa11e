package csv

import (
	"bufio"
	"encoding/csv"
	"fmt"
	"io"
	"math/rand/v2"
	"strings"
	"testing"

	"github.com/apache/arrow/go/v16/arrow/memory"

	"labelweir/connectors/internal/textrows"
	"labelweir/connectors/table"
)

// line is a table of 20 measurements and a grade, as the packing line writes it.
func line(rows int) string {
	r := rand.New(rand.NewPCG(1, 2))
	var b strings.Builder
	b.WriteString("grade")
	for i := range 20 {
		fmt.Fprintf(&b, ",m%d", i)
	}
	for range rows {
		b.WriteString([]string{"\nextra", "\nfirst", "\njuice", "\n\"first, red\""}[r.IntN(4)])
		for range 20 {
			fmt.Fprintf(&b, ",%.5g", 100*r.Float64())
		}
	}
	b.WriteByte('\n')
	return b.String()
}

const benchRows = 100_000

// copyRows reads a table and writes it as it came, without tags.
func copyRows(tb testing.TB, f table.File) {
	rd := must(open(f, table.ReadOptions{Rows: 4096, Peek: 10000, MostRow: 64 << 20, Memory: memory.NewGoAllocator()}))
	w := must(create(io.Discard, rd.Schema(), table.WriteOptions{Manner: rd.(table.Manner).Manner(), Memory: memory.NewGoAllocator()}))
	for {
		rec, err := rd.Next()
		if err == io.EOF {
			break
		}
		if err != nil {
			tb.Fatal(err)
		}
		if err := w.Write(rec); err != nil {
			tb.Fatal(err)
		}
		rec.Release()
	}
	if err := w.Close(); err != nil {
		tb.Fatal(err)
	}
}

// BenchmarkCopy is reader to writer, the look at the first 10,000 rows and Arrow columns included.
func BenchmarkCopy(b *testing.B) {
	f := file(line(benchRows))
	b.SetBytes(f.Size)
	b.ReportAllocs()
	for b.Loop() {
		copyRows(b, f)
	}
}

// BenchmarkEncodingCSVCopy reads and writes with the standard library alone.
func BenchmarkEncodingCSVCopy(b *testing.B) {
	f := file(line(benchRows))
	b.SetBytes(f.Size)
	b.ReportAllocs()
	for b.Loop() {
		r := csv.NewReader(bufio.NewReaderSize(io.NewSectionReader(f, 0, f.Size), textrows.FlushBytes))
		r.ReuseRecord = true
		w := csv.NewWriter(bufio.NewWriterSize(io.Discard, textrows.FlushBytes))
		for {
			row, err := r.Read()
			if err == io.EOF {
				break
			}
			if err != nil {
				b.Fatal(err)
			}
			if err := w.Write(row); err != nil {
				b.Fatal(err)
			}
		}
		w.Flush()
	}
}

// Twice the rows cost hardly more allocations: those of the record batches, none a row.
func TestRowsAllocateNothing(t *testing.T) {
	count := func(rows int) float64 {
		f := file(line(rows))
		return testing.AllocsPerRun(2, func() { copyRows(t, f) })
	}
	few, many := count(8192), count(16_384)
	if perRow := (many - few) / 8192; perRow > 0.1 {
		t.Errorf("%.2f allocations a row", perRow)
	}
}
