package arrowfile

import (
	"fmt"

	"github.com/apache/arrow/go/v16/arrow/memory"
)

// capped refuses single pieces of memory beyond a limit with a panic, which the reader's fence turns into an error. The
// lengths in a damaged file ask for more than there is, and running out of memory can't be caught.
type capped struct {
	memory.Allocator
	most int
}

// mostBytes is the limit for one buffer of a file of so many bytes: compressed ones may grow to a gigabyte.
func mostBytes(size int64) int { return 1<<30 + int(size) }

// Allocate implements memory.Allocator.
func (c capped) Allocate(n int) []byte {
	c.check(n)
	return c.Allocator.Allocate(n)
}

// Reallocate implements memory.Allocator.
func (c capped) Reallocate(n int, b []byte) []byte {
	c.check(n)
	return c.Allocator.Reallocate(n, b)
}

func (c capped) check(n int) {
	if n < 0 || n > c.most {
		panic(fmt.Errorf("a buffer of %d bytes, more than the %d allowed here", n, c.most))
	}
}
