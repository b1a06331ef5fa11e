package csv

import (
	"fmt"
	"io"
	"unicode/utf8"

	"github.com/apache/arrow/go/v16/arrow"
	"github.com/apache/arrow/go/v16/arrow/array"

	"labelweir/connectors/internal/column"
	"labelweir/connectors/table"
)

// A record batch is full, however few rows it has, when its rows have so many bytes or its columns so many cells: empty
// cells take room in memory too.
const (
	batchBytes = 16 << 20
	batchCells = 4 << 20
)

// reader implements table.Reader.
type reader struct {
	rows   *rows
	opt    table.ReadOptions
	size   int64
	header *header
	schema *arrow.Schema
	text   []bool // see mustBeText
	other  bool   // the rows of the input before this file have another delimiter: don't keep the bytes of these

	columns []column.Text
	raw     column.Text
	place   table.Place
	err     error // sticky
}

func newReader(f table.File, opt table.ReadOptions) (*reader, error) {
	h, err := readHeader(f, opt)
	if err != nil {
		return nil, err
	}
	r := &reader{rows: newRows(f, h.delimiter, opt.MostRow), opt: opt, size: f.Size, header: h, text: mustBeText(h.names, opt.Text),
		columns: make([]column.Text, len(h.names)), place: table.Place{Path: f.Path}}
	r.opt.Rows = min(opt.Rows, batchCells/len(h.names))
	r.rows.columns, r.rows.beyond = len(h.names), h.line
	r.rows.feed.Restart(h.end)
	first := likeDelimiter(opt.Like, h.delimiter)
	r.other = first != h.delimiter
	r.schema = h.schema(first)
	return r, nil
}

// likeDelimiter is the delimiter that the rows of like are kept with; own when it does not tell.
func likeDelimiter(like *arrow.Schema, own byte) byte {
	if like != nil {
		if i := table.RawIndex(like); i >= 0 {
			if d, ok := like.Field(i).Metadata.GetValue(delimiterKey); ok && len(d) == 1 {
				return d[0]
			}
		}
	}
	return own
}

// Schema implements table.Reader.
func (r *reader) Schema() *arrow.Schema { return r.schema }

// Manner implements table.Manner.
func (r *reader) Manner() any { return r.header.manner }

// Place implements table.Reader.
func (r *reader) Place() table.Place { return r.place }

// Progress implements table.Reader.
func (r *reader) Progress() (done, size int64) { return r.rows.feed.Offset(), r.size }

// Close implements table.Reader.
func (r *reader) Close() error { return nil }

// Next implements table.Reader.
func (r *reader) Next() (arrow.Record, error) {
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
	return r.take(n), nil
}

// fill collects rows for a record batch.
func (r *reader) fill() (n int, err error) {
	r.place.Line = r.rows.beyond
	r.opt.Tell(r.place, "")
	for size := 0; n < r.opt.Rows && size < batchBytes; {
		ok, err := r.rows.next()
		if !ok || err != nil {
			return n, err
		}
		if r.rows.reason == "" {
			r.check()
		}
		if r.rows.reason != "" {
			if err := r.setAside(); err != nil {
				return n, err
			}
			continue
		}
		if n == 0 {
			r.place.Line = r.rows.line
		}
		r.add()
		size += len(r.rows.text)
		n++
	}
	return n, nil
}

// check sets the reason when a cell that must be text is none.
func (r *reader) check() {
	for i, must := range r.text {
		if must && !utf8.Valid(r.rows.cell(i)) {
			r.rows.reason = fmt.Sprintf("cell %d, %q, is not UTF-8 text", i+1, r.header.names[i])
			return
		}
	}
}

// setAside passes a row that can't be read on.
func (r *reader) setAside() error {
	u := r.rows.unreadable()
	if r.opt.Unreadable == nil {
		r.place.Line = u.Line
		return r.rows.fault("the row can't be read: "+u.Reason, "mend the row, or name an output for unreadable rows", nil)
	}
	return r.opt.Unreadable(u)
}

// add takes the row's cells.
func (r *reader) add() {
	cells := r.rows.row.Cells
	for i := range r.columns {
		switch c, col := cells[i], &r.columns[i]; {
		case c.Lo == c.Hi:
			col.AppendNull()
		case c.Doubled:
			col.End(undouble(col.Begin(), r.rows.cell(i)))
		default:
			col.Append(r.rows.cell(i))
		}
	}
	text, end := r.rows.text[:r.rows.row.Text], r.rows.text[r.rows.row.Text:]
	switch newline := r.header.newline; {
	case r.other:
		r.raw.AppendNull()
	case len(end) > 0 && end[len(end)-1] == '\n' && string(end) != newline:
		r.raw.Append(r.rows.text) // its end is not the usual one
	default:
		r.raw.Append(text)
	}
}

// take makes the record batch of what was collected.
func (r *reader) take(n int) arrow.Record {
	arrs := make([]arrow.Array, 0, len(r.columns)+1)
	for i := range r.columns {
		arrs = append(arrs, r.columns[i].Take(r.header.types[i], r.opt.Memory))
	}
	arrs = append(arrs, r.raw.Take(arrow.BinaryTypes.Binary, r.opt.Memory))
	rec := array.NewRecord(r.schema, arrs, int64(n))
	for _, a := range arrs {
		a.Release()
	}
	return rec
}

var (
	_ table.Reader = (*reader)(nil)
	_ table.Manner = (*reader)(nil)
)
