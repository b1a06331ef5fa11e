//go:build linux

package main

import (
	"bufio"
	"bytes"
	"errors"
	"io"
	"os"
	"os/exec"
	"path/filepath"
	"strconv"
	"strings"
	"syscall"
	"testing"
	"time"

	"github.com/apache/arrow/go/v16/arrow"
	"github.com/apache/arrow/go/v16/arrow/array"
	"github.com/apache/arrow/go/v16/arrow/ipc"
	"github.com/apache/arrow/go/v16/arrow/memory"

	"labelweir/filter/cmd/labelweir/internal/demo"
)

// running is a sweep in a process of its own, that trains.
type running struct {
	cmd   *exec.Cmd
	line  string // the input
	dir   string // where the outputs go
	child int    // the guarded process
	lines *bufio.Scanner
}

// training starts a sweep over so long a line that it trains for seconds, and comes back when it does.
func training(t *testing.T, flags ...string) *running {
	t.Helper()
	dir := t.TempDir()
	line := filepath.Join(dir, "line.arrow")
	if err := demo.Grow(20_000, 1).WriteLine(line); err != nil {
		t.Fatal(err)
	}
	r := &running{line: line, dir: filepath.Join(dir, "out")}
	if err := os.Mkdir(r.dir, 0o777); err != nil {
		t.Fatal(err)
	}
	program, err := os.Executable()
	if err != nil {
		t.Fatal(err)
	}
	r.cmd = exec.Command(program)
	r.cmd.Args = append([]string{"labelweir", "sweep", line, "--label", "grade", "--out", filepath.Join(r.dir, "tagged.arrow"),
		"--report", filepath.Join(r.dir, "report.json"), "--snapshot", filepath.Join(r.dir, "last.weir")}, flags...)
	stderr, err := r.cmd.StderrPipe()
	if err != nil {
		t.Fatal(err)
	}
	if err := r.cmd.Start(); err != nil {
		t.Fatal(err)
	}
	r.lines = bufio.NewScanner(stderr)
	for r.lines.Scan() && !strings.HasPrefix(r.lines.Text(), "leaving out") {
	}
	r.child = childOf(t, r.cmd.Process.Pid)
	return r
}

// childOf gives the one child of a process; proc(5) lists those of each of its threads.
func childOf(t *testing.T, pid int) int {
	t.Helper()
	lists, err := filepath.Glob("/proc/" + strconv.Itoa(pid) + "/task/*/children")
	if err != nil {
		t.Fatal(err)
	}
	var children []string
	for _, list := range lists {
		text, err := os.ReadFile(list)
		if err != nil {
			t.Skip("this kernel does not list the children of a process")
		}
		children = append(children, strings.Fields(string(text))...)
	}
	if len(children) != 1 {
		t.Fatalf("process %d has the children %v, want one", pid, children)
	}
	child, err := strconv.Atoi(children[0])
	if err != nil {
		t.Fatal(err)
	}
	return child
}

// end waits for the end and gives the last line said and the exit code, −1 for a signal.
func (r *running) end() (said string, code int) {
	for r.lines.Scan() {
		said = r.lines.Text()
	}
	_ = r.cmd.Wait()
	return said, r.cmd.ProcessState.ExitCode()
}

// empty fails unless nothing is left in the folder of the outputs.
func (r *running) empty(t *testing.T) {
	t.Helper()
	if left, err := os.ReadDir(r.dir); err != nil || len(left) > 0 {
		t.Errorf("left behind: %v %v", left, err)
	}
}

func TestAKilledChildIsToldOfAndCleanedUpAfter(t *testing.T) {
	r := training(t)
	if left, err := os.ReadDir(r.dir); err != nil || len(left) != 3 {
		t.Errorf("while it trains the folder holds %v, %v; want three unfinished files", left, err)
	}
	if err := syscall.Kill(r.child, syscall.SIGKILL); err != nil {
		t.Fatal(err)
	}
	said, code := r.end()
	// Most often it trains by now; on a busy machine it may still be reading.
	begins := map[int]string{exitFailed: "labelweir: sweep: in the phase ", exitInput: "labelweir: " + r.line + ": "}
	if begin, ok := begins[code]; !ok || !strings.HasPrefix(said, begin) {
		t.Errorf("ended with %d and said %q", code, said)
	}
	const end = " was ended by a signal: killed; somebody ended it, or the machine ran out of memory"
	if !strings.HasSuffix(said, end) {
		t.Errorf("said %q", said)
	}
	r.empty(t)
}

func TestAKilledParentTakesTheChildWithIt(t *testing.T) {
	r := training(t)
	if err := r.cmd.Process.Kill(); err != nil {
		t.Fatal(err)
	}
	r.end() // the child holds standard error until it ends
	for range 200 {
		if syscall.Kill(r.child, 0) != nil {
			break
		}
		<-time.After(50 * time.Millisecond)
	}
	if syscall.Kill(r.child, 0) == nil {
		t.Errorf("process %d is still there", r.child)
	}
	r.empty(t)
}

func TestTrustNeedsNoChild(t *testing.T) {
	dir := t.TempDir()
	in, out := filepath.Join(dir, "in.arrow"), filepath.Join(dir, "out.arrow")
	if err := demo.Grow(120, 1).WriteLine(in); err != nil {
		t.Fatal(err)
	}
	program, err := os.Executable()
	if err != nil {
		t.Fatal(err)
	}
	// Where no page can be shared, only a trusted file can be read.
	for _, c := range []struct {
		flags []string
		code  int
		want  string
	}{{nil, exitFailed, "give --trust"}, {[]string{"--trust"}, 0, "records read"}} {
		cmd := exec.Command(program)
		cmd.Args = append([]string{"labelweir", "sweep", in, "--label", "grade", "--out", out}, c.flags...)
		cmd.Env = append(os.Environ(), "TMPDIR="+filepath.Join(dir, "none"))
		said, err := cmd.CombinedOutput()
		if cmd.ProcessState.ExitCode() != c.code || !strings.Contains(string(said), c.want) {
			t.Errorf("%v: %v, %s", c.flags, err, said)
		}
	}
}

// zeros writes a file of columns of so many bytes of zeros each, in one record batch. Not compressed, they are holes in it.
func zeros(path string, columns, size int, options ...ipc.Option) (err error) {
	file, err := os.Create(path)
	if err != nil {
		return err
	}
	defer func() { err = errors.Join(err, file.Close()) }()
	rows := size / 8
	data := array.NewData(arrow.PrimitiveTypes.Float64, rows, []*memory.Buffer{nil, memory.NewBufferBytes(make([]byte, size))}, nil, 0, 0)
	defer data.Release()
	var fields []arrow.Field
	var values []arrow.Array
	for i := range columns {
		name := "size_" + strconv.Itoa(i)
		if i == 0 {
			name = "grade"
		}
		fields = append(fields, arrow.Field{Name: name, Type: arrow.PrimitiveTypes.Float64})
		values = append(values, array.MakeFromData(data))
	}
	schema := arrow.NewSchema(fields, nil)
	record := array.NewRecord(schema, values, int64(rows))
	defer record.Release()
	w := ipc.NewWriter(holes{file}, append(options, ipc.WithSchema(schema))...)
	return errors.Join(w.Write(record), w.Close())
}

// holes leaves out zeros of megabytes, which take no place on the disk then.
type holes struct{ file *os.File }

func (h holes) Write(b []byte) (int, error) {
	if len(b) < 1<<20 || bytes.Count(b, []byte{0}) < len(b) {
		return h.file.Write(b)
	}
	_, err := h.file.Seek(int64(len(b)), io.SeekCurrent)
	return len(b), err
}

func TestAFileThatTakesTooMuchMemoryIsNamed(t *testing.T) {
	program, err := os.Executable()
	if err != nil {
		t.Fatal(err)
	}
	for _, c := range []struct {
		name    string
		options []ipc.Option
		want    string
	}{
		{"bomb.arrows", []ipc.Option{ipc.WithZstd()}, `record batch 1, column "size_1": the record batch can't be read: it unpacks to 128 MB or more, ` +
			"and 85 may be; the file is damaged, or wants smaller record batches or a higher limit of memory\n"},
		{"giant.arrows", nil, "record batch 1: the process that read it ran out of memory beyond the 256MiB it may take; " +
			"the file is damaged, or too large for this limit: write it again, or raise input.memory\n"},
	} {
		t.Run(c.name, func(t *testing.T) {
			dir := t.TempDir()
			if err := zeros(filepath.Join(dir, c.name), 10, 64<<20, c.options...); err != nil {
				t.Fatal(err)
			}
			cmd := exec.Command(program)
			cmd.Args = []string{"labelweir", "sweep", c.name, "--label", "grade", "--out", "out.arrow", "--memory", "256MiB"}
			cmd.Dir = dir
			said, err := cmd.CombinedOutput()
			if cmd.ProcessState.ExitCode() != exitInput {
				t.Errorf("ended with %v", err)
			}
			if want := "labelweir: " + c.name + ": " + c.want; string(said) != want {
				t.Errorf("said %q\nwant %q", said, want)
			}
			if left, err := os.ReadDir(dir); err != nil || len(left) != 1 {
				t.Errorf("left behind: %v %v", left, err)
			}
		})
	}
}
