package main

import (
	"bytes"
	"fmt"
	"os"
	"path/filepath"

	"github.com/apache/arrow/go/v16/arrow/ipc"
	"github.com/apache/arrow/go/v16/arrow/memory"

	"github.com/rogpeppe/go-internal/testscript"

	"labelweir/connectors/arrowfile"
	"labelweir/connectors/csv"
	"labelweir/connectors/jsonlines"
	"labelweir/connectors/parquet"
	"labelweir/connectors/table"
)

// convert writes an Arrow file's rows as what the ending of another name means: convert IN.arrow OUT.
func convert(ts *testscript.TestScript, neg bool, args []string) {
	if neg || len(args) != 2 {
		ts.Fatalf("usage: convert IN.arrow OUT")
	}
	ts.Check(convertFile(ts.MkAbs(args[0]), ts.MkAbs(args[1])))
}

func convertFile(in, out string) error {
	f, err := os.Open(in)
	if err != nil {
		return err
	}
	defer f.Close()
	r, err := ipc.NewFileReader(f)
	if err != nil {
		return err
	}
	defer r.Close()
	to, err := os.Create(out)
	if err != nil {
		return err
	}
	defer to.Close()
	format := map[string]table.Format{".parquet": parquet.Format(), ".csv": csv.Format(), ".jsonl": jsonlines.Format(),
		".arrows": arrowfile.Formats()[1]}[filepath.Ext(out)]
	w, err := format.Create(to, r.Schema(), table.WriteOptions{Memory: memory.DefaultAllocator})
	if err != nil {
		return err
	}
	for i := range r.NumRecords() {
		rec, err := r.Record(i)
		if err != nil {
			return err
		}
		if err := w.Write(rec); err != nil {
			return err
		}
	}
	return w.Close()
}

// begins checks that each line of a file begins as the line of another does, up to its closing brace: begins FILE WITH.
func begins(ts *testscript.TestScript, neg bool, args []string) {
	if neg || len(args) != 2 {
		ts.Fatalf("usage: begins FILE WITH")
	}
	lines := bytes.Split([]byte(ts.ReadFile(args[0])), []byte("\n"))
	with := bytes.Split([]byte(ts.ReadFile(args[1])), []byte("\n"))
	if len(lines) != len(with) {
		ts.Fatalf("%d lines, %d in %s", len(lines), len(with), args[1])
	}
	for i, line := range lines {
		if !bytes.HasPrefix(line, bytes.TrimSuffix(with[i], []byte("}"))) {
			ts.Fatalf("line %d is %s, which does not begin with %s", i+1, line, with[i])
		}
	}
}

// spoil puts a line of text behind a line of a file: spoil FILE LINE TEXT.
func spoil(ts *testscript.TestScript, neg bool, args []string) {
	if neg || len(args) != 3 {
		ts.Fatalf("usage: spoil FILE LINE TEXT")
	}
	var at int
	_, err := fmt.Sscan(args[1], &at)
	ts.Check(err)
	lines := bytes.SplitAfter([]byte(ts.ReadFile(args[0])), []byte("\n"))
	whole := bytes.Join(append(append(lines[:at:at], []byte(args[2]+"\n")), lines[at:]...), nil)
	ts.Check(os.WriteFile(ts.MkAbs(args[0]), whole, 0o666))
}
