package csv

import (
	"fmt"
	"unicode/utf8"

	"github.com/apache/arrow/go/v16/arrow"

	"labelweir/connectors/internal/column"
	"labelweir/connectors/internal/textrows"
	"labelweir/connectors/table"
)

// columns collects the cells of a file's rows; it implements textrows.Rows.
type columns struct {
	*rows
	header *header
	must   []bool // see mustBeText
	other  bool   // the rows of the input before this file have another delimiter: don't keep the bytes of these
	opt    table.ReadOptions

	cells []column.Text
	raw   column.Text
}

func open(f table.File, opt table.ReadOptions) (table.Reader, error) {
	h, err := readHeader(f, opt)
	if err != nil {
		return nil, err
	}
	first := likeDelimiter(opt.Like, h.delimiter)
	c := &columns{rows: newRows(f, h.delimiter, opt.MostRow), header: h, must: mustBeText(h.names, opt.Text),
		other: first != h.delimiter, opt: opt, cells: make([]column.Text, len(h.names))}
	c.rows.columns, c.Beyond = len(h.names), h.line
	c.Feed.Restart(h.end)
	return textrows.NewReader(textrows.Table{Cursor: &c.Cursor, Rows: c, Schema: h.schema(first), Manner: h.manner,
		Row: "row", Width: len(h.names)}, opt), nil
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

// Take implements textrows.Rows.
func (c *columns) Take(int) (reason string) {
	for i, must := range c.must {
		if must && !utf8.Valid(c.cell(i)) {
			return fmt.Sprintf("cell %d, %q, is not UTF-8 text", i+1, c.header.names[i])
		}
	}
	cells := c.row.Cells
	for i := range c.cells {
		switch cell, col := cells[i], &c.cells[i]; {
		case cell.Lo == cell.Hi:
			col.AppendNull()
		case cell.Doubled:
			col.End(undouble(col.Begin(), c.cell(i)))
		default:
			col.Append(c.cell(i))
		}
	}
	c.keep()
	return ""
}

// keep takes the row's bytes, with its line's end when that is not the usual one.
func (c *columns) keep() {
	end := c.whole[len(c.Row):]
	switch {
	case c.other:
		c.raw.AppendNull()
	case len(end) > 0 && end[len(end)-1] == '\n' && string(end) != c.header.newline:
		c.raw.Append(c.whole)
	default:
		c.raw.Append(c.Row)
	}
}

// Columns implements textrows.Rows.
func (c *columns) Columns() []arrow.Array {
	c.whole = nil // Next sets it anew; a very long row should not stay in memory
	arrs := make([]arrow.Array, 0, len(c.cells)+1)
	for i := range c.cells {
		arrs = append(arrs, c.cells[i].Take(c.header.types[i], c.opt.Memory))
	}
	return append(arrs, c.raw.Take(arrow.BinaryTypes.Binary, c.opt.Memory))
}
