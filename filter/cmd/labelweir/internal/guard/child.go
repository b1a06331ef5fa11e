package guard

import (
	"fmt"
	"os"
	"runtime/debug"
	"strconv"
)

// variable is set in the child's environment, to the limit in bytes. Its files are at the numbers below.
const variable = "WEIR_GUARDED"

const (
	errFile  = 3 + iota // what people read
	lifeFile            // pipe whose other end is the parent's
	pageFile            // the shared page
)

// maxStack bounds the stack of one goroutine; nothing of ours recurses deeply, and Go's own limit is a gigabyte.
const maxStack = 64 << 20

// Child is the guarded process's side.
type Child struct {
	Err    *os.File      // what was standard error
	Marks  *Marks        // never nil
	Orphan chan struct{} // closed when the parent is gone
}

// Join makes this process the guarded one when [Run] has started it: it takes the limits upon itself and gives what
// links it to the parent. In any other process it gives nil.
func Join() (*Child, error) {
	value := os.Getenv(variable)
	if value == "" {
		return nil, nil
	}
	if err := os.Unsetenv(variable); err != nil {
		return nil, err
	}
	limit, err := strconv.ParseInt(value, 10, 64)
	if err != nil {
		return nil, fmt.Errorf("%s is %q, which no parent of this process has set; unset it", variable, value)
	}
	page, err := openPage(os.NewFile(pageFile, "page"))
	if err != nil {
		return nil, fmt.Errorf("%s is set, but not by a parent of this process; unset it: %w", variable, err)
	}
	c := &Child{Err: os.NewFile(errFile, "standard error"), Marks: &Marks{page: page}, Orphan: make(chan struct{})}
	debug.SetMaxStack(maxStack)
	if err := limitMemory(limit); err != nil {
		return nil, err
	}
	life := os.NewFile(lifeFile, "parent")
	go func() { // ends with the process, or when the parent has ended
		_, _ = life.Read(make([]byte, 1)) // nothing is ever written to it
		close(c.Orphan)
	}()
	return c, nil
}
