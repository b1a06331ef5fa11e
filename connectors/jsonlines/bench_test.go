package jsonlines

import (
	"bufio"
	"encoding/json"
	"fmt"
	"io"
	"math/rand/v2"
	"strings"
	"testing"

	"github.com/apache/arrow/go/v16/arrow"
	"github.com/apache/arrow/go/v16/arrow/memory"

	"labelweir/connectors/internal/textrows"
	"labelweir/connectors/table"
)

// line is a table of 20 measurements and a grade, as the packing line writes it. Each line has two members more that are
// not among the first ones.
func line(rows int) string {
	r := rand.New(rand.NewPCG(1, 2))
	var b strings.Builder
	for i := range rows {
		b.WriteString(`{"grade":"` + []string{"extra", "first", "juice", `first, \"red\"`}[r.IntN(4)] + `"`)
		for k := range 20 {
			fmt.Fprintf(&b, `,"m%d":%.5g`, k, 100*r.Float64())
		}
		if i > 10 {
			b.WriteString(`,"late":1,"later":2`)
		}
		b.WriteString("}\n")
	}
	return b.String()
}

const benchRows = 100_000

// copyRows reads a table and writes it as it came, without tags.
func copyRows(tb testing.TB, f table.File, peek int) {
	rd := must(open(f, table.ReadOptions{Rows: 4096, Peek: peek, MostRow: 64 << 20, Memory: memory.NewGoAllocator()}))
	w := must(create(io.Discard, rd.Schema(), table.WriteOptions{Manner: rd.(table.Manner).Manner(), Memory: memory.NewGoAllocator()}))
	err := each(tb, rd, func(rec arrow.Record) {
		if err := w.Write(rec); err != nil {
			tb.Fatal(err)
		}
	})
	if err == nil {
		err = w.Close()
	}
	if err != nil {
		tb.Fatal(err)
	}
}

// BenchmarkCopy is reader to writer, the look at the first 10,000 lines and Arrow columns included.
func BenchmarkCopy(b *testing.B) {
	f := file(line(benchRows))
	b.SetBytes(f.Size)
	b.ReportAllocs()
	for b.Loop() {
		copyRows(b, f, 10_000)
	}
}

// BenchmarkEncodingJSONCopy decodes into maps, for the members are not known, and encodes them with the standard library
// alone.
func BenchmarkEncodingJSONCopy(b *testing.B) {
	f := file(line(benchRows))
	b.SetBytes(f.Size)
	b.ReportAllocs()
	for b.Loop() {
		d := json.NewDecoder(bufio.NewReaderSize(io.NewSectionReader(f, 0, f.Size), textrows.FlushBytes))
		e := json.NewEncoder(bufio.NewWriterSize(io.Discard, textrows.FlushBytes))
		for {
			var row map[string]any
			err := d.Decode(&row)
			if err == io.EOF {
				break
			}
			if err == nil {
				err = e.Encode(row)
			}
			if err != nil {
				b.Fatal(err)
			}
		}
	}
}

// BenchmarkEncodingJSONRawCopy decodes into maps of raw values, the least that encoding/json can do without knowing the
// members.
func BenchmarkEncodingJSONRawCopy(b *testing.B) {
	f := file(line(benchRows))
	b.SetBytes(f.Size)
	b.ReportAllocs()
	for b.Loop() {
		d := json.NewDecoder(bufio.NewReaderSize(io.NewSectionReader(f, 0, f.Size), textrows.FlushBytes))
		e := json.NewEncoder(bufio.NewWriterSize(io.Discard, textrows.FlushBytes))
		for {
			var row map[string]json.RawMessage
			err := d.Decode(&row)
			if err == io.EOF {
				break
			}
			if err == nil {
				err = e.Encode(row)
			}
			if err != nil {
				b.Fatal(err)
			}
		}
	}
}

// Twice the lines cost hardly more allocations: those of the record batches, none a line.
func TestLinesAllocateNothing(t *testing.T) {
	count := func(rows int) float64 {
		f := file(line(rows))
		return testing.AllocsPerRun(2, func() { copyRows(t, f, 10) })
	}
	few, many := count(8192), count(16_384)
	if perLine := (many - few) / 8192; perLine > 0.1 {
		t.Errorf("%.2f allocations a line", perLine)
	}
}
