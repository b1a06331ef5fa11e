package csv

import (
	"bytes"
	"fmt"
	"io"
	"os"
	"os/exec"
	"path/filepath"
	"testing"

	"github.com/apache/arrow/go/v16/arrow"
	"github.com/apache/arrow/go/v16/arrow/array"
	"github.com/apache/arrow/go/v16/arrow/memory"

	"labelweir/connectors/table"
)

func must[T any](v T, err error) T {
	if err != nil {
		panic(err)
	}
	return v
}

// options are those of most tests; memory that is not given back fails the test.
func options(t testing.TB) table.ReadOptions {
	mem := memory.NewCheckedAllocator(memory.NewGoAllocator())
	t.Cleanup(func() { mem.AssertSize(t, 0) })
	return table.ReadOptions{Rows: 4096, Peek: 10000, MostRow: 64 << 20, Memory: mem}
}

func file(text string) table.File {
	return table.File{ReaderAt: bytes.NewReader([]byte(text)), Path: "apples.csv", Size: int64(len(text))}
}

// asided collects unreadable rows.
type asided []string

func (a *asided) take(u table.Unreadable) error {
	*a = append(*a, fmt.Sprintf("%s line %d byte %d %q: %s", u.File, u.Line, u.Byte, u.Bytes, u.Reason))
	return nil
}

// content reads text whole: the columns' types, and each row's cells, null as ~.
func content(t testing.TB, text string, opt table.ReadOptions) (types []string, rows [][]string, err error) {
	t.Helper()
	rd, err := open(file(text), opt)
	if err != nil {
		return nil, nil, err
	}
	defer rd.Close()
	fields := rd.Schema().Fields()
	for _, f := range fields[:len(fields)-1] {
		types = append(types, f.Name+" "+f.Type.String())
	}
	for {
		rec, err := rd.Next()
		if err == io.EOF {
			return types, rows, nil
		}
		if err != nil {
			return types, rows, err
		}
		for i := range int(rec.NumRows()) {
			var row []string
			for _, c := range rec.Columns()[:len(types)] {
				row = append(row, cellOf(c, i))
			}
			rows = append(rows, row)
		}
		rec.Release()
	}
}

func cellOf(c arrow.Array, i int) string {
	if e, ok := c.(array.ExtensionArray); ok {
		c = e.Storage()
	}
	if c.IsNull(i) {
		return "~"
	}
	if b, ok := c.(*array.Binary); ok {
		return string(b.Value(i))
	}
	return c.(*array.String).Value(i)
}

// tagged gives a record batch the tag columns that the tests write: a score, a verdict and an implied label.
func tagged(rec arrow.Record, schema *arrow.Schema) arrow.Record {
	score, verdict, implied := array.NewFloat64Builder(memory.DefaultAllocator), array.NewStringBuilder(memory.DefaultAllocator), array.NewStringBuilder(memory.DefaultAllocator)
	for i := range int(rec.NumRows()) {
		score.Append(float64(i%8) / 8)
		verdict.Append("pass")
		implied.Append(`Gala "A", red`)
	}
	cols := append(append([]arrow.Array(nil), rec.Columns()...), score.NewArray(), verdict.NewArray(), implied.NewArray())
	return array.NewRecord(schema, cols, rec.NumRows())
}

func withTags(schema *arrow.Schema) *arrow.Schema {
	fields := append([]arrow.Field(nil), schema.Fields()...)
	return arrow.NewSchema(append(fields, arrow.Field{Name: "weir_score", Type: arrow.PrimitiveTypes.Float64, Nullable: true},
		arrow.Field{Name: "weir_verdict", Type: arrow.BinaryTypes.String}, arrow.Field{Name: "weir_implied", Type: arrow.BinaryTypes.String, Nullable: true}), nil)
}

// copied reads text and writes it with tags behind it.
func copied(t testing.TB, text string, opt table.ReadOptions) string {
	t.Helper()
	var out bytes.Buffer
	copyTo(t, &out, file(text), opt)
	return out.String()
}

func copyTo(t testing.TB, out io.Writer, f table.File, opt table.ReadOptions) {
	t.Helper()
	rd := must(open(f, opt))
	defer rd.Close()
	schema := withTags(rd.Schema())
	w := must(create(out, schema, table.WriteOptions{Manner: rd.(table.Manner).Manner(), Memory: memory.DefaultAllocator}))
	for {
		rec, err := rd.Next()
		if err == io.EOF {
			break
		}
		if err != nil {
			t.Fatal(err)
		}
		full := tagged(rec, schema)
		if err := w.Write(full); err != nil {
			t.Fatal(err)
		}
		full.Release()
		rec.Release()
	}
	if err := w.Close(); err != nil {
		t.Fatal(err)
	}
}

// python runs a script of testdata and gives what it prints. Without the module the test is skipped, under CI it fails.
func python(t testing.TB, module, script string, args ...string) []byte {
	t.Helper()
	if out, err := exec.Command("python3", "-c", "import "+module).CombinedOutput(); err != nil {
		if os.Getenv("CI") != "" {
			t.Fatalf("python3 with %s is needed: %v\n%s", module, err, out)
		}
		t.Skip("python3 with " + module + " is needed")
	}
	cmd := exec.Command("python3", append([]string{filepath.Join("testdata", script)}, args...)...)
	cmd.Stderr = os.Stderr
	out, err := cmd.Output()
	if err != nil {
		t.Fatalf("%s %v: %v", script, args, err)
	}
	return out
}
