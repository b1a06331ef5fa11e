package main

import (
	"bufio"
	"errors"
	"os"
	"os/exec"
	"path/filepath"
	"strings"
	"syscall"
	"testing"

	"labelweir/filter/cmd/labelweir/internal/demo"
)

// TestASignalLeavesNoHalfFile stops a sweep in the midst of its work, in a process of its own.
func TestASignalLeavesNoHalfFile(t *testing.T) {
	program, err := os.Executable()
	if err != nil {
		t.Fatal(err)
	}
	line := filepath.Join(t.TempDir(), "line.arrow")
	if err := demo.Grow(20_000, 1).WriteLine(line); err != nil {
		t.Fatal(err)
	}
	for s, want := range map[syscall.Signal]int{syscall.SIGINT: 130, syscall.SIGTERM: 143} {
		t.Run(s.String(), func(t *testing.T) {
			dir := t.TempDir()
			// A window this long trains for many seconds: the signal comes first.
			c := exec.CommandContext(t.Context(), program)
			c.Args = []string{"labelweir", "sweep", line, "--label", "grade", "--source", "grader",
				"--mode", "divert", "--out", filepath.Join(dir, "passed.arrow"), "--quarantine", filepath.Join(dir, "held.arrow"),
				"--report", filepath.Join(dir, "report.json"), "--snapshot", filepath.Join(dir, "last.weir")}
			stderr, err := c.StderrPipe()
			if err != nil {
				t.Fatal(err)
			}
			if err := c.Start(); err != nil {
				t.Fatal(err)
			}
			lines := bufio.NewScanner(stderr)
			for lines.Scan() && !strings.HasPrefix(lines.Text(), "leaving out") {
			}
			if parts, err := os.ReadDir(dir); err != nil || len(parts) == 0 {
				t.Errorf("it had not begun to write: %v", err)
			}
			if err := c.Process.Signal(s); err != nil {
				t.Fatal(err)
			}
			said := ""
			for lines.Scan() {
				said = lines.Text()
			}
			var e *exec.ExitError
			if err := c.Wait(); !errors.As(err, &e) || e.ExitCode() != want {
				t.Errorf("ended with %v, want %d", err, want)
			}
			if want := "labelweir: stopped by " + s.String() + "; no output was written"; said != want {
				t.Errorf("said %q, want %q", said, want)
			}
			if left, err := os.ReadDir(dir); err != nil || len(left) > 0 {
				t.Errorf("left behind: %v %v", left, err)
			}
		})
	}
}
