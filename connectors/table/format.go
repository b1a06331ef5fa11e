package table

import (
	"io"

	"github.com/apache/arrow/go/v16/arrow"
	"github.com/apache/arrow/go/v16/arrow/memory"
)

// Reader gives the record batches of one file in order. It belongs to one goroutine.
type Reader interface {
	// Schema is the schema of every record batch. A hidden last column may hold each row's bytes, see RawField.
	Schema() *arrow.Schema
	// Next gives the next record batch, which the caller releases, or io.EOF after the last. Errors are *Error and name
	// the file, the record batch, row group or line, and the column where it is known. Record batches may have no rows.
	Next() (arrow.Record, error)
	// Place is where the record batch given last stands, or the one that could not be read.
	Place() Place
	// Progress tells how many bytes of how many have been read.
	Progress() (done, size int64)
	// Close gives everything back but the record batches handed out. The file stays open: it is the caller's.
	Close() error
}

// Writer writes record batches of one schema. It belongs to one goroutine.
type Writer interface {
	// Write takes a record batch, which stays the caller's.
	Write(arrow.Record) error
	// Close writes the end of the file. It is called once, also after a failed Write; the io.Writer stays open.
	Close() error
}

// Manner is implemented by readers that know how their file was written beyond its schema: compression, delimiter,
// metadata of the file. A writer of the same format gets it as WriteOptions.Manner, to write alike.
type Manner interface {
	// Manner is a value that only the format's own writer looks into.
	Manner() any
}

// Place is a place in a file. Zero fields are not known.
type Place struct {
	Path  string // the file
	Batch int    // record batch, counted from 1
	Group int    // row group, counted from 1
	Line  int64  // line of the first row of the batch, counted from 1
}

// Unreadable is a row that could not be read.
type Unreadable struct {
	File   string // path of the file
	Line   int64  // where it begins, counted from 1
	Byte   int64  // where it begins, counted from 0
	Bytes  []byte // the row as it stands there, without the line's end; valid during the call only
	Reason string // in plain words
}

// File is an open file to read.
type File struct {
	io.ReaderAt
	Path string // for messages
	Size int64  // bytes
}

// ReadOptions are what a Reader is opened with.
type ReadOptions struct {
	Rows int // most rows of a record batch that the reader cuts itself, above 0
	Peek int // first rows looked at when types are inferred, above 0

	// Like is the schema of the first of several files, or of the same file opened before: columns of the same name take
	// the type they have there instead of one inferred from this file's own rows. Nil for none. Formats whose files
	// carry their own types ignore it.
	Like *arrow.Schema
	// Text names the columns whose values must be UTF-8: a row where one is not is unreadable. Others may hold any bytes.
	Text []string
	// Unreadable takes each row that can't be read, in order; its error ends the reading. Nil makes the first such row
	// an error of Next.
	Unreadable func(Unreadable) error
	// Delimiter between the cells of a row; 0: found out. Only for CSV.
	Delimiter byte
	// MostRow is the most bytes that one row may have, above 0. Only for formats of text.
	MostRow int
	// MostBatch is the most bytes that a compressed record batch may unpack to; 0: no limit.
	MostBatch int64
	// Mark, if set, is told before a record batch is read where it stands, and before each column of it where that is
	// known, so that it can still be said when reading ends the process.
	Mark func(at Place, column string)
	// Memory gives out the record batches; never nil.
	Memory memory.Allocator
}

// Tell calls Mark if it is set.
func (o *ReadOptions) Tell(at Place, column string) {
	if o.Mark != nil {
		o.Mark(at, column)
	}
}

// WriteOptions are what a Writer is created with.
type WriteOptions struct {
	Name   string           // of the file to be; empty when it has none
	Manner any              // of the input's Reader when it has the same format, else nil
	Memory memory.Allocator // never nil
}

// Format is one file format.
type Format struct {
	Name    string   // as it is asked for: "csv"
	Title   string   // in messages: "CSV"
	Endings []string // of file names that mean it, in small letters, with the dot; the first is the usual one
	Magic   [][]byte // what a file of it can begin with; empty: nothing tells it
	Pipe    bool     // it can be written without knowing its length
	Rows    bool     // its files are rows one after the other: how they are cut into record batches does not show

	Open   func(f File, opt ReadOptions) (Reader, error)
	Create func(w io.Writer, schema *arrow.Schema, opt WriteOptions) (Writer, error)
}
