package main

import (
	"bytes"
	"path/filepath"
	"strings"
	"testing"

	"github.com/apache/arrow/go/v16/arrow"
)

// TestProgressIsForTerminalsOnly runs one sweep as on a terminal and one as in a pipe.
func TestProgressIsForTerminalsOnly(t *testing.T) {
	dir := t.TempDir()
	line := filepath.Join(dir, "line.arrow")
	schema := arrow.NewSchema([]arrow.Field{
		{Name: "size", Type: arrow.PrimitiveTypes.Float64, Nullable: true}, {Name: "grade", Type: arrow.BinaryTypes.String, Nullable: true},
	}, nil)
	if err := writeArrow(line, schema, 200, []string{"good", "label"}); err != nil {
		t.Fatal(err)
	}
	for _, terminal := range []bool{true, false} {
		var out, err bytes.Buffer
		p := &process{out: &output{w: &out}, err: &err, screen: &err, terminal: terminal, environ: func() []string { return nil }}
		args := []string{"sweep", line, "--label", "grade", "--replace", "--out", filepath.Join(dir, "out.arrow")}
		if got := run(t.Context(), p, args); got != 0 {
			t.Fatalf("ended with %d: %s", got, err.String())
		}
		const clear = "\r\x1b[K"
		if drawn := strings.Contains(err.String(), clear); drawn != terminal {
			t.Errorf("terminal %v: progress drawn %v", terminal, drawn)
		}
		if last := err.String()[strings.LastIndex(err.String(), clear)+1:]; terminal && strings.Contains(last, "░") {
			t.Errorf("the summary follows a bar that was not cleared: %q", last)
		}
		if out.Len() > 0 {
			t.Errorf("standard output got %q", out.String())
		}
	}
}
