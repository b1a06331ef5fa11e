package main

import (
	"bytes"
	"path/filepath"
	"strings"
	"testing"

	"labelweir/filter/cmd/labelweir/internal/demo"
)

// TestProgressIsForTerminalsOnly runs one sweep as on a terminal and one as in a pipe.
func TestProgressIsForTerminalsOnly(t *testing.T) {
	dir := t.TempDir()
	line := filepath.Join(dir, "line.arrow")
	if err := demo.Grow(500, 1).WriteLine(line); err != nil {
		t.Fatal(err)
	}
	for _, terminal := range []bool{true, false} {
		var out, err bytes.Buffer
		p := &process{out: &out, err: &err, terminal: terminal, environ: func() []string { return nil }}
		args := []string{"sweep", line, "--label", "grade", "--fields", "diameter_mm,firmness_n", "--replace", "--out", filepath.Join(dir, "out.arrow")}
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
