//go:build unix && !linux

package guard

import (
	"os"
	"runtime/debug"
	"syscall"
	"time"
)

// self is this program.
func self() string {
	path, err := os.Executable()
	if err != nil {
		return os.Args[0]
	}
	return path
}

// attributes has nothing to add: the pipe tells the child that its parent is gone.
func attributes() *syscall.SysProcAttr { return nil }

// used stands in for processor time, which can't be looked up here without more than the standard library: all time
// counts.
func used(int) time.Duration { return time.Duration(time.Now().UnixNano()) }

// limitMemory makes the collector work harder. There is no hard limit: outside of Linux a Go program may reserve far
// more address space than it uses, so that a limit of it says nothing.
func limitMemory(bytes int64) error {
	debug.SetMemoryLimit(bytes - bytes/8)
	return nil
}
