package main

import (
	"os"
	"os/exec"
	"path/filepath"
	"slices"
	"strings"
	"testing"

	"labelweir/filter/cmd/labelweir/internal/demo"
)

const root = "../../.." // of the module

// readmeBlocks gives the README's fenced blocks in that language, in order.
func readmeBlocks(t *testing.T, language string) []string {
	t.Helper()
	text, err := os.ReadFile(filepath.Join(root, "README.md"))
	if err != nil {
		t.Fatal(err)
	}
	var blocks []string
	for part := range strings.SplitSeq(string(text), "```"+language+"\n") {
		if block, _, ok := strings.Cut(part, "```"); ok {
			blocks = append(blocks, block)
		}
	}
	return blocks[1:] // what stands before the first one
}

// TestReadmeCommandsWork runs every command block of the README in its order, as a reader would: the go commands in the
// module's folder, the others beside the reader's file, which is the demo's line here, with the program that the README
// built. Only "go test ./..." is not run, since this test is part of it.
func TestReadmeCommandsWork(t *testing.T) {
	if testing.Short() {
		t.Skip("trains several models")
	}
	dir := t.TempDir()
	if err := demo.Grow(1200, 1).WriteLine(filepath.Join(dir, "grading.arrow")); err != nil {
		t.Fatal(err)
	}
	settings := readmeBlocks(t, "yaml")
	if len(settings) != 1 {
		t.Fatalf("%d yaml blocks, want 1: weir.yaml", len(settings))
	}
	if err := os.WriteFile(filepath.Join(dir, "weir.yaml"), []byte(settings[0]), 0o666); err != nil {
		t.Fatal(err)
	}
	tests := 0
	for _, block := range readmeBlocks(t, "sh") {
		for line := range strings.Lines(block) {
			words := strings.Fields(line)
			switch {
			case strings.Join(words, " ") == "go test ./...":
				tests++
			case words[0] == "go":
				if at := slices.Index(words, "-o"); at > 0 {
					words[at+1] = filepath.Join(dir, words[at+1])
				}
				readmeCommand(t, root, words[0], words[1:])
			default:
				readmeCommand(t, dir, filepath.Join(dir, words[0]), words[1:])
			}
		}
	}
	if tests != 1 {
		t.Errorf("the README tells %d times how to run the tests", tests)
	}
	for _, name := range []string{"tagged.arrow", "report.json", "passed.arrow", "held.arrow", "last.weir"} {
		if info, err := os.Stat(filepath.Join(dir, name)); err != nil || info.Size() == 0 {
			t.Errorf("after all commands: %s is missing or empty: %v", name, err)
		}
	}
}

func readmeCommand(t *testing.T, dir, program string, args []string) {
	t.Helper()
	c := exec.CommandContext(t.Context(), program, args...)
	c.Dir = dir
	if out, err := c.CombinedOutput(); err != nil {
		t.Fatalf("%s %s: %v\n%s", program, strings.Join(args, " "), err, out)
	}
}

// TestReadmeListsTheExitCodes holds the table against the constants.
func TestReadmeListsTheExitCodes(t *testing.T) {
	text, err := os.ReadFile(filepath.Join(root, "README.md"))
	if err != nil {
		t.Fatal(err)
	}
	for _, row := range []string{"| 0 |", "| 1 |", "| 3 |", "| 64 |", "| 65 |", "| 73 |", "| 74 |", "| 78 |", "| 130, 143 |"} {
		if strings.Count(string(text), row) != 1 {
			t.Errorf("the README's table of exit codes has no row %s", row)
		}
	}
	for name, got := range map[string]int{
		"failed": exitFailed, "gate": exitGate, "usage": exitUsage, "input": exitInput, "create": exitCreate, "write": exitWrite, "config": exitConfig,
	} {
		want := map[string]int{"failed": 1, "gate": 3, "usage": 64, "input": 65, "create": 73, "write": 74, "config": 78}[name]
		if got != want {
			t.Errorf("%s ends with %d, and the README says %d", name, got, want)
		}
	}
}
