package arrowfile

import "github.com/apache/arrow/go/v16/arrow/memory"

// Options of reading and writing.
type Options struct {
	Rows    int  // most records in a batch; default 4096
	Peek    int  // first rows looked at when fields are inferred; default 10000
	Replace bool // write over targets that exist; default false

	// For tests: counts what was not given back, and cuts record batches smaller.
	mem                   memory.Allocator
	blockRows, blockBytes int64
}

// DefaultOptions gives the defaults named in Options.
func DefaultOptions() Options { return Options{Rows: 4096, Peek: 10000} }

// filled puts defaults where a count is not positive.
func (o Options) filled() Options {
	d := DefaultOptions()
	if o.Rows <= 0 {
		o.Rows = d.Rows
	}
	if o.Peek <= 0 {
		o.Peek = d.Peek
	}
	if o.blockRows == 0 {
		o.blockRows, o.blockBytes = blockRows, blockBytes
	}
	if o.mem == nil {
		o.mem = memory.NewGoAllocator()
	}
	return o
}
