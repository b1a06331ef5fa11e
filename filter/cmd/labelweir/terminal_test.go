//go:build linux

package main

import (
	"io"
	"os"
	"os/exec"
	"path/filepath"
	"strconv"
	"strings"
	"syscall"
	"testing"
	"unsafe"

	"labelweir/filter/cmd/labelweir/internal/demo"
)

// pseudoTerminal opens both ends of a terminal, as pty(7) tells.
func pseudoTerminal(t *testing.T) (ours, theirs *os.File) {
	t.Helper()
	ours, err := os.OpenFile("/dev/ptmx", os.O_RDWR|syscall.O_NOCTTY, 0)
	if err != nil {
		t.Skipf("no pseudo-terminals here: %v", err)
	}
	t.Cleanup(func() { ours.Close() })
	var locked, number int32
	for _, call := range []struct {
		request uintptr
		value   *int32
	}{{syscall.TIOCSPTLCK, &locked}, {syscall.TIOCGPTN, &number}} {
		if _, _, errno := syscall.Syscall(syscall.SYS_IOCTL, ours.Fd(), call.request, uintptr(unsafe.Pointer(call.value))); errno != 0 {
			t.Skipf("no pseudo-terminals here: %v", errno)
		}
	}
	theirs, err = os.OpenFile("/dev/pts/"+strconv.Itoa(int(number)), os.O_RDWR|syscall.O_NOCTTY, 0)
	if err != nil {
		t.Skipf("no pseudo-terminals here: %v", err)
	}
	return ours, theirs
}

// TestTheGuardedProcessDrawsOnTheTerminal runs a sweep on a terminal: the bar is drawn and cleared, and the summary follows.
func TestTheGuardedProcessDrawsOnTheTerminal(t *testing.T) {
	ours, theirs := pseudoTerminal(t)
	dir := t.TempDir()
	in := filepath.Join(dir, "in.arrow")
	if err := demo.Grow(120, 1).WriteLine(in); err != nil {
		t.Fatal(err)
	}
	program, err := os.Executable()
	if err != nil {
		t.Fatal(err)
	}
	cmd := exec.Command(program)
	cmd.Args = []string{"labelweir", "sweep", in, "--label", "grade", "--out", filepath.Join(dir, "out.arrow")}
	cmd.Stderr = theirs
	if err := cmd.Start(); err != nil {
		t.Fatal(err)
	}
	theirs.Close()
	seen, _ := io.ReadAll(ours) // ends in an error when nobody holds the other end any more
	if err := cmd.Wait(); err != nil {
		t.Errorf("ended with %v", err)
	}
	shown := string(seen)
	const clear = "\r\x1b[K"
	bar, summary := strings.Index(shown, "░"), strings.Index(shown, "records read")
	if bar < 0 || summary < bar || !strings.Contains(shown[bar:summary], clear) {
		t.Errorf("shown was %q", shown)
	}
}
