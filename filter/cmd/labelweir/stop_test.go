//go:build linux

package main

import (
	"bytes"
	"encoding/json"
	"errors"
	"io"
	"math/rand/v2"
	"os"
	"os/exec"
	"path/filepath"
	"strconv"
	"strings"
	"syscall"
	"testing"
	"time"

	"labelweir/connectors/arrowfile"
	"labelweir/connectors/table"
	"labelweir/filter"
	"labelweir/filter/cmd/labelweir/internal/demo"
	"labelweir/model"
)

// TestNoMomentIsABadOneToStop stops sweeps in all four ways at random moments. Afterwards there is no half file, what
// stands under its name is whole, the tagged file is the last to come, and the input is as it was. LABELWEIR_LONG=1
// makes it many.
func TestNoMomentIsABadOneToStop(t *testing.T) {
	rounds := 8
	if os.Getenv("LABELWEIR_LONG") != "" {
		rounds = 200
	} else if testing.Short() {
		t.Skip("trains several models")
	}
	const rows = 120
	in := filepath.Join(t.TempDir(), "line.arrow")
	if err := demo.Grow(rows, 1).WriteLine(in); err != nil {
		t.Fatal(err)
	}
	before, err := os.ReadFile(in)
	if err != nil {
		t.Fatal(err)
	}
	began := time.Now()
	whole := startStoppable(t, in, t.TempDir())
	if err := whole.Wait(); err != nil {
		t.Fatalf("undisturbed it ended with %v: %s", err, whole.Stderr)
	}
	typical := time.Since(began)
	rng := rand.New(rand.NewPCG(11, 4))
	for round := range rounds {
		dir := t.TempDir()
		cmd := startStoppable(t, in, dir)
		share := 1.1 * rng.Float64()
		if round/4%2 == 1 { // the names are given at the end
			share = 0.95 + 0.1*rng.Float64()
		}
		<-time.After(time.Duration(share * float64(typical)))
		way := stop(cmd.Process.Pid, round%4)
		_ = cmd.Wait() // returns when the child, too, has closed standard error
		for _, f := range settled(t, dir) {
			if strings.Contains(f, ".part-") {
				t.Errorf("%s in round %d: %s is left\n%s", way, round, f, cmd.Stderr)
			}
		}
		if cmd.ProcessState.Success() && !exists(dir, "tagged.arrow") {
			t.Errorf("%s in round %d: it says all is well, but there is no tagged file", way, round)
		}
		wholeOutputs(t, dir, rows)
	}
	if after, err := os.ReadFile(in); err != nil || !bytes.Equal(after, before) {
		t.Errorf("the input was touched: %v", err)
	}
}

func startStoppable(t *testing.T, in, dir string) *exec.Cmd {
	t.Helper()
	program, err := os.Executable()
	if err != nil {
		t.Fatal(err)
	}
	cmd := exec.Command(program)
	cmd.Args = []string{"labelweir", "sweep", in, "--label", "grade", "--out", filepath.Join(dir, "tagged.arrow"),
		"--report", filepath.Join(dir, "report.json"), "--snapshot", filepath.Join(dir, "last.weir")}
	cmd.Stderr = &bytes.Buffer{}
	if err := cmd.Start(); err != nil {
		t.Fatal(err)
	}
	return cmd
}

// stop stops a sweep, one way or the other; that it has ended by itself already is no matter.
func stop(pid, way int) string {
	switch way {
	case 0:
		_ = syscall.Kill(pid, syscall.SIGINT)
		return "Ctrl-C"
	case 1:
		_ = syscall.Kill(pid, syscall.SIGTERM)
		return "SIGTERM"
	case 2:
		lists, _ := filepath.Glob("/proc/" + strconv.Itoa(pid) + "/task/*/children")
		for _, list := range lists {
			text, _ := os.ReadFile(list)
			for child := range strings.FieldsSeq(string(text)) {
				n, _ := strconv.Atoi(child)
				_ = syscall.Kill(n, syscall.SIGKILL)
			}
		}
		return "kill -9 of the child"
	}
	_ = syscall.Kill(pid, syscall.SIGKILL)
	return "kill -9 of the parent"
}

// settled lists a folder once a second look shows the same, or for what it is after two seconds.
func settled(t *testing.T, dir string) (names []string) {
	t.Helper()
	for range 20 {
		entries, err := os.ReadDir(dir)
		if err != nil {
			t.Fatal(err)
		}
		names = nil
		parts := false
		for _, e := range entries {
			names = append(names, e.Name())
			parts = parts || strings.Contains(e.Name(), ".part-")
		}
		if !parts {
			break
		}
		<-time.After(100 * time.Millisecond)
	}
	return names
}

func exists(dir, name string) bool {
	_, err := os.Stat(filepath.Join(dir, name))
	return err == nil
}

// wholeOutputs reads what stands in the folder.
func wholeOutputs(t *testing.T, dir string, rows int) {
	t.Helper()
	if exists(dir, "report.json") {
		text, err := os.ReadFile(filepath.Join(dir, "report.json"))
		if err == nil {
			err = json.Unmarshal(text, new(filter.Report))
		}
		if err != nil {
			t.Errorf("the report is not whole: %v", err)
		}
	}
	if exists(dir, "last.weir") {
		file, err := os.Open(filepath.Join(dir, "last.weir"))
		if err != nil {
			t.Fatal(err)
		}
		defer file.Close()
		if _, err := model.ReadSnapshot(file); err != nil {
			t.Errorf("the snapshot is not whole: %v", err)
		}
	}
	if !exists(dir, "tagged.arrow") {
		return
	}
	if !exists(dir, "report.json") || !exists(dir, "last.weir") {
		t.Error("the tagged file stands there without the report or the snapshot")
	}
	if n, err := rowsOf(t, filepath.Join(dir, "tagged.arrow")); err != nil || n != rows {
		t.Errorf("the tagged file has %d rows of %d: %v", n, rows, err)
	}
}

func rowsOf(t *testing.T, path string) (n int, err error) {
	source, err := arrowfile.Open(path, filter.Record{Label: "grade"}, table.DefaultOptions())
	if err != nil {
		return 0, err
	}
	defer source.Close()
	for {
		b, err := source.Next(t.Context())
		if errors.Is(err, io.EOF) {
			return n, nil
		}
		if err != nil {
			return n, err
		}
		n += b.Rows()
		b.Release()
	}
}
