package jsonlines

import (
	"context"
	"io"
	"os"
	"path/filepath"
	"testing"

	"labelweir/connectors/table"
	"labelweir/filter"
)

// BenchmarkTagged is all that a sweep does beside the model: features, labels and tags too.
func BenchmarkTagged(b *testing.B) {
	text := line(benchRows)
	path := filepath.Join(b.TempDir(), "line.jsonl")
	if err := os.WriteFile(path, []byte(text), 0o600); err != nil {
		b.Fatal(err)
	}
	opt := table.DefaultOptions(Format())
	opt.Replace = true
	tags := make([]filter.Tag, opt.Rows)
	for i := range tags {
		tags[i] = filter.Tag{Score: 0.25, Margin: 1, Implied: "first", Snapshot: "0123456789ab"}
	}
	b.SetBytes(int64(len(text)))
	b.ReportAllocs()
	for b.Loop() {
		src := must(table.Open([]table.Input{{Path: path}}, filter.Record{Label: "grade"}, opt))
		sink := must(table.Create(table.OutputPaths{Tagged: filepath.Join(filepath.Dir(path), "out.jsonl")}, src, opt))
		for {
			batch, err := src.Next(context.Background())
			if err == io.EOF {
				break
			}
			if err == nil {
				err = sink.Deliver(context.Background(), batch, tags[:batch.Rows()])
			}
			if err != nil {
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
}
