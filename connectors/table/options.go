package table

import (
	"io"

	"github.com/apache/arrow/go/v16/arrow/memory"

	"labelweir/connectors/disk"
)

// Options of reading and writing.
type Options struct {
	Formats []Format // those that files may have

	Rows       int                    // most records in a batch; default 4096
	Peek       int                    // first rows looked at when fields are inferred; default 10000
	InFormat   string                 // name of the input's format; empty: from its first bytes, else from the file's name
	Delimiter  byte                   // between the cells of a CSV file; 0: found out
	MostRow    int                    // most bytes of one row of text; default 64 MiB
	MostBatch  int64                  // most bytes that a compressed record batch may unpack to; 0: no limit
	Unreadable func(Unreadable) error // takes rows that can't be read, in order; nil: the first is an error

	Mark func(at Place, column string) // see ReadOptions.Mark

	OutFormat string    // name of the outputs' format; empty: from their names, else the input's
	Pipe      io.Writer // takes what is written to the path "-"; nil: nothing may be
	Replace   bool      // write over targets that exist; default false

	BlockRows  int64 // most rows of a record batch written; default 16384
	BlockBytes int64 // most bytes of one, if it has several rows; default 32 MiB

	Memory memory.Allocator // nil: Go's own
	Disk   disk.FS          // where outputs go; nil: the machine's disk
}

// DefaultOptions gives the defaults named in Options, for files of the given formats.
func DefaultOptions(formats ...Format) Options { return Options{Formats: formats}.filled() }

// filled puts defaults where a value is not set.
func (o Options) filled() Options {
	if o.Rows <= 0 {
		o.Rows = 4096
	}
	if o.Peek <= 0 {
		o.Peek = 10000
	}
	if o.MostRow <= 0 {
		o.MostRow = 64 << 20
	}
	if o.BlockRows <= 0 {
		o.BlockRows = 16384
	}
	if o.BlockBytes <= 0 {
		o.BlockBytes = 32 << 20
	}
	if o.Memory == nil {
		o.Memory = memory.NewGoAllocator()
	}
	if o.Disk == nil {
		o.Disk = disk.OS{}
	}
	return o
}
