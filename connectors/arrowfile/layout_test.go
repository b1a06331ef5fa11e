package arrowfile

import (
	"bytes"
	"fmt"
	"math/rand/v2"
	"os"
	"path/filepath"
	"strings"
	"testing"

	"github.com/apache/arrow/go/v16/arrow"
	"github.com/apache/arrow/go/v16/arrow/array"
	"github.com/apache/arrow/go/v16/arrow/ipc"
	"github.com/apache/arrow/go/v16/arrow/memory"
	"pgregory.net/rapid"

	"labelweir/connectors/table"
	"labelweir/filter"
)

// crate is one row of the table that layout tests write; an empty text is null.
type crate struct {
	mass            float64
	colour, grade   string
	moisture        [2]float32
	weighed         bool
	remark, labeler string
}

func crates(n int, seed uint64) []crate {
	r := rand.New(rand.NewPCG(seed, 1))
	pick := func(s ...string) string { return s[r.IntN(len(s))] }
	out := make([]crate, n)
	for i := range out {
		out[i] = crate{r.NormFloat64(), pick("red", "green", "mixed", ""), pick("extra", "first", "juice", ""),
			[2]float32{float32(r.IntN(9)), float32(r.IntN(9))}, r.IntN(4) > 0, strings.Repeat("ø", r.IntN(30)), pick("Liv", "Odd")}
	}
	return out
}

// crateSchema: dictionaries unless plain.
func crateSchema(plain bool) *arrow.Schema {
	var name arrow.DataType = &arrow.DictionaryType{IndexType: arrow.PrimitiveTypes.Uint16, ValueType: arrow.BinaryTypes.String}
	if plain {
		name = arrow.BinaryTypes.String
	}
	meta := arrow.NewMetadata([]string{"line"}, []string{"2"})
	return arrow.NewSchema([]arrow.Field{
		{Name: "mass", Type: arrow.PrimitiveTypes.Float64, Nullable: true}, {Name: "colour", Type: name, Nullable: true},
		{Name: "grade", Type: name, Nullable: true}, {Name: "moisture", Type: arrow.FixedSizeListOf(2, arrow.PrimitiveTypes.Float32)},
		{Name: "remark", Type: arrow.BinaryTypes.String}, {Name: "labeler", Type: arrow.BinaryTypes.LargeString},
	}, &meta)
}

// crateBatch makes a record batch; its dictionaries hold its own words in the order in which they come.
func crateBatch(schema *arrow.Schema, rows []crate) arrow.Record {
	b := array.NewRecordBuilder(memory.DefaultAllocator, schema)
	defer b.Release()
	list := b.Field(3).(*array.FixedSizeListBuilder)
	for _, c := range rows {
		if c.weighed {
			b.Field(0).(*array.Float64Builder).Append(c.mass)
		} else {
			b.Field(0).AppendNull()
		}
		appendName(b.Field(1), c.colour)
		appendName(b.Field(2), c.grade)
		list.Append(true)
		list.ValueBuilder().(*array.Float32Builder).AppendValues(c.moisture[:], nil)
		b.Field(4).(*array.StringBuilder).Append(c.remark)
		b.Field(5).(*array.LargeStringBuilder).Append(c.labeler)
	}
	return b.NewRecord()
}

func appendName(b array.Builder, s string) {
	switch b := b.(type) {
	case *array.StringBuilder:
		if s == "" {
			b.AppendNull()
		} else {
			b.Append(s)
		}
	case *array.BinaryDictionaryBuilder:
		if s == "" {
			b.AppendNull()
		} else if err := b.AppendString(s); err != nil {
			panic(err)
		}
	}
}

// writeCrates writes rows with arrow/go's own writers, cut at the given rows.
func writeCrates(t testing.TB, path string, format Format, plain bool, rows []crate, cuts []int) {
	t.Helper()
	f, err := os.Create(path)
	if err != nil {
		t.Fatal(err)
	}
	defer f.Close()
	schema := crateSchema(plain)
	var w interface {
		Write(arrow.Record) error
		Close() error
	} = ipc.NewWriter(f, ipc.WithSchema(schema))
	if format == File {
		if w, err = ipc.NewFileWriter(f, ipc.WithSchema(schema)); err != nil {
			t.Fatal(err)
		}
	}
	last := 0
	for _, cut := range append(cuts, len(rows)) {
		rec := crateBatch(schema, rows[last:cut])
		err := w.Write(rec)
		rec.Release()
		if err != nil {
			t.Fatal(err)
		}
		last = cut
	}
	if err := w.Close(); err != nil {
		t.Fatal(err)
	}
}

// sortedCuts draws rising row numbers up to n, repeats allowed.
func sortedCuts(t *rapid.T, n int) []int {
	var cuts []int
	for at := 0; len(cuts) < 6 && rapid.Bool().Draw(t, "cut"); {
		at = rapid.IntRange(at, n).Draw(t, "at")
		cuts = append(cuts, at)
	}
	return cuts
}

func TestBatchesDoNotDependOnTheLayout(t *testing.T) {
	dir := t.TempDir()
	rec := filter.Record{Label: "grade", Source: "labeler"}
	rapid.Check(t, func(rt *rapid.T) {
		n := rapid.IntRange(1, 120).Draw(rt, "rows")
		rows := crates(n, rapid.Uint64().Draw(rt, "seed"))
		read := func(format Format, plain bool, cuts []int) []string {
			path := filepath.Join(dir, "crates.arrow")
			writeCrates(t, path, format, plain, rows, cuts)
			src, err := Open(path, rec, table.Options{Rows: rapid.IntRange(1, 50).Draw(rt, "batch")})
			if err != nil {
				rt.Fatal(err)
			}
			defer src.Close()
			return allRows(t, src)
		}
		want := read(File, true, nil)
		for _, x := range []struct {
			format Format
			plain  bool
		}{{File, true}, {Stream, true}, {Stream, false}} {
			cuts := sortedCuts(rt, n)
			if got := read(x.format, x.plain, cuts); strings.Join(got, "\n") != strings.Join(want, "\n") {
				rt.Fatalf("%s, plain %v, cut at %v: the rows differ", x.format, x.plain, cuts)
			}
		}
	})
}

func TestOutputBytesDoNotDependOnTheLayout(t *testing.T) {
	dir := t.TempDir()
	rec := filter.Record{Label: "grade"}
	rapid.Check(t, func(rt *rapid.T) {
		n := rapid.IntRange(0, 120).Draw(rt, "rows")
		rows := crates(n, rapid.Uint64().Draw(rt, "seed"))
		format := rapid.SampledFrom([]Format{File, Stream}).Draw(rt, "format")
		limits := table.Options{BlockRows: rapid.Int64Range(1, 150).Draw(rt, "block rows"), BlockBytes: rapid.Int64Range(40, 4000).Draw(rt, "block bytes")}
		var want [2][]byte
		for k := range 2 {
			var cuts []int
			opt := limits
			if k > 0 {
				cuts, opt.Rows = sortedCuts(rt, n), rapid.IntRange(1, 50).Draw(rt, "batch")
			}
			opt.Replace = true
			in, out := filepath.Join(dir, "in"), table.OutputPaths{Tagged: filepath.Join(dir, "tagged"), Quarantine: filepath.Join(dir, "held")}
			writeCrates(t, in, format, true, rows, cuts)
			src, err := Open(in, rec, opt)
			if err != nil {
				rt.Fatal(err)
			}
			copyFile(t, src, out, opt, tagOf)
			src.Close()
			for i, path := range []string{out.Tagged, out.Quarantine} {
				got, err := os.ReadFile(path)
				if err != nil {
					rt.Fatal(err)
				}
				if k > 0 && !bytes.Equal(got, want[i]) {
					rt.Fatalf("%s differs when the input is cut at %v and read %d rows at a time", path, cuts, opt.Rows)
				}
				want[i] = got
			}
		}
	})
}

// Blocks of 512 rows and their multiples need not be copied when they stand in the input like that.
func TestOutputBytesDoNotDependOnWhatIsCopied(t *testing.T) {
	dir := t.TempDir()
	in, rows := filepath.Join(dir, "in"), crates(1300, 7)
	var want []byte
	for _, cuts := range [][]int{nil, {100, 700}, {512, 1024}, {1, 2, 600, 601}} {
		writeCrates(t, in, Stream, true, rows, cuts)
		for _, batch := range []int{64, 100, 4096} {
			opt := counted(t)
			opt.Rows, opt.BlockRows, opt.Replace = batch, 512, true
			out := table.OutputPaths{Tagged: filepath.Join(dir, "tagged")}
			copyFile(t, open(t, in, filter.Record{Label: "grade"}, opt), out, opt, func(row int64) filter.Tag {
				tag := tagOf(row)
				tag.Divert = false
				return tag
			})
			got := must(os.ReadFile(out.Tagged))
			if want != nil && !bytes.Equal(got, want) {
				t.Errorf("the output differs when the input is cut at %v and read %d rows at a time", cuts, batch)
			}
			want = got
		}
	}
}

func TestRecordBatchesWrittenAreBounded(t *testing.T) {
	in, out := filepath.Join(t.TempDir(), "in"), outIn(t, ".arrow")
	rows := crates(50, 1)
	for i := range rows {
		rows[i].remark = strings.Repeat("x", 1000)
	}
	writeCrates(t, in, File, true, rows, nil)
	opt := counted(t)
	opt.BlockRows, opt.BlockBytes = 7, 1<<20
	var cut []string
	for range 2 {
		copyFile(t, open(t, in, filter.Record{Label: "grade"}, opt), out, opt, func(int64) filter.Tag { return filter.Tag{} })
		again, sizes := counted(t), []int{}
		each(t, open(t, out.Tagged, filter.Record{Label: "grade"}, again), func(b *filter.Batch) { sizes = append(sizes, b.Rows()) })
		cut = append(cut, fmt.Sprint(sizes))
		opt.BlockRows, opt.BlockBytes, opt.Replace = 1000, 5*1060, true
	}
	if cut[0] != "[7 7 7 7 7 7 7 1]" || cut[1] != "[5 5 5 5 5 5 5 5 5 5]" {
		t.Errorf("got batches of %s and %s rows", cut[0], cut[1])
	}
}
