package arrowfile

import (
	"io"

	"github.com/apache/arrow/go/v16/arrow"
	"github.com/apache/arrow/go/v16/arrow/ipc"

	"labelweir/connectors/table"
	"labelweir/filter"
)

// Formats are the Arrow IPC file and the Arrow IPC stream. Each reads both: the bytes tell which it is.
func Formats() []table.Format {
	return []table.Format{
		{Name: "arrow", Title: "Arrow file", Endings: []string{".arrow", ".feather", ".ipc"}, Magic: [][]byte{ipc.Magic},
			Open: openReader, Create: creator(File)},
		{Name: "arrows", Title: "Arrow stream", Endings: []string{".arrows", ".arrow", ".ipc"}, Magic: [][]byte{{0xFF, 0xFF, 0xFF, 0xFF}}, Pipe: true,
			Open: openReader, Create: creator(Stream)},
	}
}

// Open opens one Arrow IPC file or stream as a filter.Source, see [table.Open].
func Open(path string, rec filter.Record, opt table.Options) (*table.Source, error) {
	opt.Formats = Formats()
	return table.Open([]table.Input{{Path: path}}, rec, opt)
}

func openReader(f table.File, opt table.ReadOptions) (table.Reader, error) {
	return newReader(f, opt)
}

func creator(format Format) func(io.Writer, *arrow.Schema, table.WriteOptions) (table.Writer, error) {
	return func(w io.Writer, schema *arrow.Schema, opt table.WriteOptions) (table.Writer, error) {
		return newWriter(w, format, schema, opt), nil
	}
}
