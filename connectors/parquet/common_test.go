package parquet

import (
	"context"
	"errors"
	"io"
	"os"
	"os/exec"
	"path/filepath"
	"testing"

	"labelweir/connectors/arrowfile"
	"labelweir/connectors/table"
	"labelweir/filter"
)

// options are without a count of memory: the library keeps what it does not need any more for the garbage collector.
func options() table.Options {
	return table.Options{Formats: append(arrowfile.Formats(), Format()), Replace: true}
}

// carry sends a file through a source and a sink.
func carry(in, out string, rec filter.Record, opt table.Options) (err error) {
	src, err := table.Open([]table.Input{{Path: in}}, rec, opt)
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

// python runs a script of testdata and gives what it prints. Without pyarrow the test is skipped, under CI it fails.
func python(t testing.TB, script string, args ...string) string {
	t.Helper()
	if out, err := exec.Command("python3", "-c", "import pyarrow, pandas").CombinedOutput(); err != nil {
		if os.Getenv("CI") != "" {
			t.Fatalf("python3 with pyarrow and pandas is needed: %v\n%s", err, out)
		}
		t.Skip("python3 with pyarrow and pandas is needed: pip install pyarrow pandas")
	}
	out, err := exec.Command("python3", append([]string{filepath.Join("testdata", script)}, args...)...).CombinedOutput()
	if err != nil {
		t.Fatalf("%s %v: %v\n%s", script, args, err, out)
	}
	return string(out)
}
