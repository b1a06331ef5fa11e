package jsonlines

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
	return table.File{ReaderAt: bytes.NewReader([]byte(text)), Path: "apples.jsonl", Size: int64(len(text))}
}

// asided collects unreadable lines.
type asided []string

func (a *asided) take(u table.Unreadable) error {
	*a = append(*a, fmt.Sprintf("line %d byte %d %s: %s", u.Line, u.Byte, u.Bytes, u.Reason))
	return nil
}

// each calls do for every record batch.
func each(t testing.TB, rd table.Reader, do func(rec arrow.Record)) error {
	t.Helper()
	for {
		rec, err := rd.Next()
		if err == io.EOF {
			return nil
		}
		if err != nil {
			return err
		}
		do(rec)
		rec.Release()
	}
}

// content reads text whole: the columns' types, and each row's values, null as ~.
func content(t testing.TB, text string, opt table.ReadOptions) (types []string, rows [][]string, err error) {
	t.Helper()
	rd, err := open(file(text), opt)
	if err != nil {
		return nil, nil, err
	}
	fields := rd.Schema().Fields()
	for _, f := range fields[:len(fields)-1] {
		types = append(types, f.Name+" "+f.Type.String())
	}
	err = each(t, rd, func(rec arrow.Record) {
		for i := range int(rec.NumRows()) {
			var row []string
			for _, c := range rec.Columns()[:len(types)] {
				row = append(row, valueOf(c, i))
			}
			rows = append(rows, row)
		}
	})
	return types, rows, err
}

func valueOf(c arrow.Array, i int) string {
	if e, ok := c.(array.ExtensionArray); ok {
		c = e.Storage()
	}
	if c.IsNull(i) {
		return "~"
	}
	return c.ValueStr(i)
}

// copied reads text and writes it with a score and an implied label.
func copied(t testing.TB, text string, opt table.ReadOptions) string {
	t.Helper()
	rd := must(open(file(text), opt))
	schema := arrow.NewSchema(append(append([]arrow.Field(nil), rd.Schema().Fields()...),
		arrow.Field{Name: "weir_score", Type: arrow.PrimitiveTypes.Float64, Nullable: true},
		arrow.Field{Name: "weir_implied", Type: arrow.BinaryTypes.String, Nullable: true}), nil)
	var out bytes.Buffer
	w := must(create(&out, schema, table.WriteOptions{Manner: rd.(table.Manner).Manner(), Memory: memory.DefaultAllocator}))
	err := each(t, rd, func(rec arrow.Record) {
		score, implied := array.NewFloat64Builder(memory.DefaultAllocator), array.NewStringBuilder(memory.DefaultAllocator)
		for i := range int(rec.NumRows()) {
			score.Append(float64(i%8) / 8)
			if i == 1 {
				implied.AppendNull()
			} else {
				implied.Append(`Gala "A"`)
			}
		}
		full := array.NewRecord(schema, append(append([]arrow.Array(nil), rec.Columns()...), score.NewArray(), implied.NewArray()), rec.NumRows())
		if err := w.Write(full); err != nil {
			t.Fatal(err)
		}
		full.Release()
	})
	if err == nil {
		err = w.Close()
	}
	if err != nil {
		t.Fatal(err)
	}
	return out.String()
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
