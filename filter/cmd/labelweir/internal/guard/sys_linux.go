package guard

import (
	"bytes"
	"os"
	"strconv"
	"syscall"
	"time"
)

// self is this program, even when its file has been replaced since.
func self() string { return "/proc/self/exe" }

// attributes has the child stop when its parent dies: the pipe tells it too, but not while it hangs.
func attributes() *syscall.SysProcAttr { return &syscall.SysProcAttr{Pdeathsig: syscall.SIGTERM} }

// used is the processor time that a process has taken, from /proc/PID/stat (proc(5)), whose unit is 10 ms.
func used(pid int) time.Duration {
	text, err := os.ReadFile("/proc/" + strconv.Itoa(pid) + "/stat")
	if err != nil {
		return 0
	}
	_, text, _ = bytes.Cut(text, []byte(") ")) // behind the name, which may hold anything
	words := bytes.Fields(text)
	if len(words) < 13 {
		return 0
	}
	user, _ := strconv.ParseInt(string(words[11]), 10, 64)
	system, _ := strconv.ParseInt(string(words[12]), 10, 64)
	return time.Duration(user+system) * 10 * time.Millisecond
}

// taken is the address space of this process, from /proc/self/statm.
func taken() int64 {
	text, err := os.ReadFile("/proc/self/statm")
	if err != nil {
		return 0
	}
	pages, _, _ := bytes.Cut(text, []byte(" "))
	n, _ := strconv.ParseInt(string(pages), 10, 64)
	return n * int64(os.Getpagesize())
}
