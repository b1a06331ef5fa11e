// Package capped is an allocator for readers of files that may be damaged.
package capped

import (
	"fmt"

	"github.com/apache/arrow/go/v16/arrow/memory"
)

// allocator refuses single pieces of memory beyond a limit with a panic, which the reader's fence turns into an error.
// The lengths in a damaged file ask for more than there is, and running out of memory can't be caught.
type allocator struct {
	memory.Allocator
	most int
}

// New is mem with a limit for one buffer of a file of so many bytes: compressed ones may grow to a gigabyte.
func New(mem memory.Allocator, size int64) memory.Allocator { return allocator{mem, 1<<30 + int(size)} }

// Allocate implements memory.Allocator.
func (a allocator) Allocate(n int) []byte {
	a.check(n)
	return a.Allocator.Allocate(n)
}

// Reallocate implements memory.Allocator.
func (a allocator) Reallocate(n int, b []byte) []byte {
	a.check(n)
	return a.Allocator.Reallocate(n, b)
}

func (a allocator) check(n int) {
	if n < 0 || n > a.most {
		panic(fmt.Errorf("a buffer of %d bytes, more than the %d allowed here", n, a.most))
	}
}
