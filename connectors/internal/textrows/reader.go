package textrows

import (
	"fmt"
	"io"

	"github.com/apache/arrow/go/v16/arrow"
	"github.com/apache/arrow/go/v16/arrow/array"

	"labelweir/connectors/table"
)

// A record batch is full, however few rows it has, when its rows have BatchBytes or its columns BatchValues: absent
// values take room in memory too.
const (
	BatchBytes  = 16 << 20
	BatchValues = 4 << 20
)

// Rows are the rows of a file.
type Rows interface {
	// Next brings the cursor to the next row, or gives false at the file's end.
	Next() (bool, error)
	// Take adds the row at the cursor as the n-th of the record batch, counted from 0. It gives the reason when the row
	// can't be read, and has added nothing then.
	Take(n int) (reason string)
	// Columns makes arrays of the rows added since the last call, one a column of the schema.
	Columns() []arrow.Array
}

// Table is a file of rows.
type Table struct {
	Cursor *Cursor // of Rows
	Rows   Rows
	Schema *arrow.Schema
	Manner any    // see table.Manner
	Row    string // what messages call a row
	Width  int    // values of a row, above 0
}

// Reader implements table.Reader and table.Manner.
type Reader struct {
	table Table
	opt   table.ReadOptions
	place table.Place
	err   error // sticky
}

// NewReader reads a table from where its cursor stands.
func NewReader(t Table, opt table.ReadOptions) *Reader {
	opt.Rows = min(opt.Rows, max(1, BatchValues/t.Width))
	return &Reader{table: t, opt: opt, place: table.Place{Path: t.Cursor.Path}}
}

// Schema implements table.Reader.
func (r *Reader) Schema() *arrow.Schema { return r.table.Schema }

// Manner implements table.Manner.
func (r *Reader) Manner() any { return r.table.Manner }

// Place implements table.Reader.
func (r *Reader) Place() table.Place { return r.place }

// Progress implements table.Reader.
func (r *Reader) Progress() (done, size int64) {
	return r.table.Cursor.Feed.Offset(), r.table.Cursor.size
}

// Close implements table.Reader.
func (r *Reader) Close() error { return nil }

// Next implements table.Reader.
func (r *Reader) Next() (arrow.Record, error) {
	if r.err != nil {
		return nil, r.err
	}
	n, err := r.fill()
	if err == nil && n == 0 {
		err = io.EOF
	}
	if err != nil {
		r.err = err
		return nil, err
	}
	r.table.Cursor.rest()
	arrs := r.table.Rows.Columns()
	rec := array.NewRecord(r.table.Schema, arrs, int64(n))
	for _, a := range arrs {
		a.Release()
	}
	return rec, nil
}

// fill collects rows for a record batch.
func (r *Reader) fill() (n int, err error) {
	c := r.table.Cursor
	r.place.Line = c.Beyond
	r.opt.Tell(r.place, "")
	for size := 0; n < r.opt.Rows && size < BatchBytes; {
		ok, err := r.table.Rows.Next()
		if !ok || err != nil {
			return n, err
		}
		if c.Reason == "" {
			c.Reason = r.table.Rows.Take(n)
		}
		if c.Reason != "" {
			if err := r.setAside(); err != nil {
				return n, err
			}
			continue
		}
		if n == 0 {
			r.place.Line = c.Line
		}
		size += len(c.Row)
		n++
	}
	return n, nil
}

// setAside passes a row that can't be read on.
func (r *Reader) setAside() error {
	c := r.table.Cursor
	if r.opt.Unreadable != nil {
		return r.opt.Unreadable(c.unreadable())
	}
	r.place.Line = c.Line
	return c.Fault(fmt.Sprintf("the %s can't be read: %s", r.table.Row, c.Reason),
		fmt.Sprintf("mend the %s, or name an output for unreadable rows", r.table.Row), nil)
}

var (
	_ table.Reader = (*Reader)(nil)
	_ table.Manner = (*Reader)(nil)
)
