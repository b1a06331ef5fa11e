package table_test

import (
	"context"
	"errors"
	"fmt"
	"io"
	"math/rand/v2"
	"os"
	"os/exec"
	"path/filepath"
	"strings"
	"testing"

	"github.com/apache/arrow/go/v16/arrow"
	"github.com/apache/arrow/go/v16/arrow/array"
	"github.com/apache/arrow/go/v16/arrow/ipc"
	"github.com/apache/arrow/go/v16/arrow/memory"

	"labelweir/connectors/arrowfile"
	"labelweir/connectors/csv"
	"labelweir/connectors/jsonlines"
	"labelweir/connectors/parquet"
	"labelweir/connectors/table"
	"labelweir/filter"
)

// randomFile writes a table of random types and values, in several record batches.
func randomFile(t *testing.T, path string, r *rand.Rand, forParquet bool) {
	t.Helper()
	fields := []arrow.Field{{Name: "label", Type: arrow.BinaryTypes.String, Nullable: true}, {Name: "x", Type: arrow.PrimitiveTypes.Float64, Nullable: true}}
	for i := range 2 + r.IntN(8) {
		f := arrow.Field{Name: fmt.Sprint("c", i), Type: randomType(r, 2, forParquet), Nullable: true}
		if r.IntN(3) == 0 {
			f.Metadata = arrow.NewMetadata([]string{"unit"}, []string{"mm"})
		}
		fields = append(fields, f)
	}
	fields = append(fields, arrow.Field{Name: "d", Type: &arrow.DictionaryType{IndexType: arrow.PrimitiveTypes.Int32, ValueType: arrow.BinaryTypes.String}, Nullable: true})
	meta := arrow.NewMetadata([]string{"line", "sort"}, []string{"2", "ø"})
	schema := arrow.NewSchema(fields, &meta)
	f, err := os.Create(path)
	if err != nil {
		t.Fatal(err)
	}
	defer f.Close()
	w := ipc.NewWriter(f, ipc.WithSchema(schema))
	for range 1 + r.IntN(3) {
		rows := r.IntN(40)
		var cols []arrow.Array
		for _, f := range fields {
			if f.Name == "d" {
				cols = append(cols, randomDictionary(r, rows))
			} else {
				cols = append(cols, randomColumn(r, f.Type, rows))
			}
		}
		if err := w.Write(array.NewRecord(schema, cols, int64(rows))); err != nil {
			t.Fatal(err)
		}
	}
	if err := w.Close(); err != nil {
		t.Fatal(err)
	}
}

func options() table.Options {
	return table.Options{Formats: append(arrowfile.Formats(), parquet.Format(), csv.Format(), jsonlines.Format()), Replace: true, Memory: memory.DefaultAllocator}
}

// carry sends a file through a source and a sink.
func carry(in, out string, opt table.Options) (err error) {
	src, err := table.Open([]table.Input{{Path: in}}, filter.Record{Label: "label", Fields: []filter.Field{{Path: "x"}}}, opt)
	if err != nil {
		return err
	}
	defer src.Close()
	sink, err := table.Create(table.OutputPaths{Tagged: out}, src, opt)
	if err != nil {
		return err
	}
	defer func() { err = errors.Join(err, sink.Close()) }()
	for {
		b, err := src.Next(context.Background())
		if err == io.EOF {
			return sink.Commit(context.Background())
		}
		if err != nil {
			return err
		}
		err = sink.Deliver(context.Background(), b, make([]filter.Tag, b.Rows()))
		b.Release()
		if err != nil {
			return err
		}
	}
}

// Tables of random types go from Arrow to every format; Apache's own Python reader, and Python's csv and json, tell
// whether they come out as they went in. Parquet goes on into Parquet once more.
func TestRandomTablesComeBackAsTheyWere(t *testing.T) {
	dir := t.TempDir()
	var jobs []string
	for seed := range uint64(60) {
		r := rand.New(rand.NewPCG(seed, 9))
		ext := []string{".arrows", ".parquet", ".csv", ".jsonl"}[seed%4]
		in, out := filepath.Join(dir, fmt.Sprint(seed, ".arrows")), filepath.Join(dir, fmt.Sprint(seed, "out", ext))
		randomFile(t, in, r, ext == ".parquet")
		opt := options()
		opt.Rows, opt.BlockRows = 1+r.IntN(30), 1+r.Int64N(50)
		if err := carry(in, out, opt); err != nil {
			t.Errorf("seed %d: %v", seed, err)
			continue
		}
		jobs = append(jobs, in, out)
	}
	if out, err := exec.Command("python3", "-c", "import pyarrow").CombinedOutput(); err != nil {
		if os.Getenv("CI") != "" {
			t.Fatalf("python3 with pyarrow is needed: %v\n%s", err, out)
		}
		t.Skip("python3 with pyarrow is needed: pip install pyarrow")
	}
	said, err := exec.Command("python3", append([]string{"testdata/same.py"}, jobs...)...).CombinedOutput()
	if err != nil || len(said) > 0 {
		t.Errorf("%v\n%s", err, strings.ReplaceAll(string(said), dir, "DIR"))
	}
}
