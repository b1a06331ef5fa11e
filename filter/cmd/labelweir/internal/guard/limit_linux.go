package guard

import (
	"fmt"
	"runtime/debug"
	"syscall"
)

// limitMemory bounds the address space to what is taken already and so many bytes more; a stricter limit from outside
// stays. The collector works harder before it is reached.
func limitMemory(bytes int64) error {
	var l syscall.Rlimit
	if err := syscall.Getrlimit(syscall.RLIMIT_AS, &l); err != nil {
		return fmt.Errorf("the limit of memory can't be read: %w", err)
	}
	l.Cur = min(l.Max, uint64(taken()+bytes))
	if err := syscall.Setrlimit(syscall.RLIMIT_AS, &l); err != nil {
		return fmt.Errorf("the limit of memory can't be set: %w", err)
	}
	debug.SetMemoryLimit(bytes - bytes/8)
	return nil
}
