package main

import (
	"os"
	"os/exec"
	"path/filepath"
	"strings"
	"testing"

	"labelweir/filter/cmd/labelweir/internal/demo"
)

// TestHelpsExamplesWork runs each example of sweep's help as it stands there, beside the files that it names.
func TestHelpsExamplesWork(t *testing.T) {
	if testing.Short() {
		t.Skip("trains several models")
	}
	shell, err := exec.LookPath("sh")
	if err != nil {
		if os.Getenv("CI") != "" {
			t.Fatal("no sh to run command lines with")
		}
		t.Skip("no sh to run command lines with")
	}
	dir := t.TempDir()
	program, err := os.Executable()
	if err != nil {
		t.Fatal(err)
	}
	if err := os.Mkdir(filepath.Join(dir, "crates"), 0o777); err != nil {
		t.Fatal(err)
	}
	if err := demo.Grow(150, 1).WriteLine(filepath.Join(dir, "grading.arrow")); err != nil {
		t.Fatal(err)
	}
	if err := os.WriteFile(filepath.Join(dir, "weir.yaml"), []byte("record: {label: grade}\noutput: {file: {tagged: gated.arrow}}\n"), 0o666); err != nil {
		t.Fatal(err)
	}
	// The test binary is the program under its name (see TestMain).
	link := filepath.Join(dir, "labelweir")
	if err := os.Symlink(program, link); err != nil {
		t.Fatal(err)
	}
	run := func(line string) {
		t.Helper()
		c := exec.CommandContext(t.Context(), shell, "-ec", line)
		c.Dir, c.Env = dir, append(os.Environ(), "PATH="+dir+string(os.PathListSeparator)+os.Getenv("PATH"))
		if out, err := c.CombinedOutput(); err != nil {
			t.Errorf("%s: %v\n%s", line, err, out)
		}
	}
	for _, name := range []string{"grading.parquet", "grading.csv", "grading.jsonl", "crates/a.csv", "crates/b.csv"} {
		if err := convertFile(filepath.Join(dir, "grading.arrow"), filepath.Join(dir, name)); err != nil {
			t.Fatal(err)
		}
	}
	for _, e := range sweepExamples() {
		run(e.line)
		words := strings.Fields(e.line)
		for i, w := range words[:len(words)-1] {
			if out := words[i+1]; (w == "--out" || w == ">") && out != "-" {
				if info, err := os.Stat(filepath.Join(dir, out)); err != nil || info.Size() == 0 {
					t.Errorf("%s: no %s: %v", e.line, out, err)
				}
			}
		}
	}
}
