package csv

import (
	"bytes"
	"io"

	"github.com/apache/arrow/go/v16/arrow"
	"github.com/apache/arrow/go/v16/arrow/array"

	"labelweir/connectors/internal/spell"
	"labelweir/connectors/internal/textrows"
	"labelweir/connectors/table"
)

// composer puts rows of cells together; it implements textrows.Composer.
type composer struct {
	manner  manner
	raw     int  // index of the hidden column, −1 when there is none
	respell bool // write rows out of their cells, also when their bytes are there
	need    [256]bool
}

func create(w io.Writer, schema *arrow.Schema, opt table.WriteOptions) (table.Writer, error) {
	c := &composer{raw: table.RawIndex(schema), manner: manner{delimiter: ',', newline: "\n"}}
	if m, ok := opt.Manner.(manner); ok {
		c.manner = m
	}
	if isTabbed(opt.Name) && c.manner.delimiter != '\t' {
		c.manner = manner{delimiter: '\t', newline: c.manner.newline}
		c.respell = true
	}
	for _, b := range []byte{c.manner.delimiter, '"', '\n', '\r'} {
		c.need[b] = true
	}
	return textrows.NewWriter(w, c, schema, c.header(schema)), nil
}

// header is the first row: the input's own, where it stands for the columns before the hidden one, and the other names.
func (c *composer) header(schema *arrow.Schema) (row []byte) {
	from := 0
	if c.raw >= 0 && len(c.manner.header) > 0 {
		row, from = append(row, c.manner.header...), c.raw+1
	}
	for i, f := range schema.Fields()[from:] {
		if i += from; i != c.raw {
			row = c.separate(row, i)
			lo := len(row)
			row = c.quote(append(row, f.Name...), lo)
		}
	}
	return append(row, c.manner.newline...)
}

// Speller implements textrows.Composer. Cells of a CSV file that are no UTF-8 are written as they came.
func (c *composer) Speller(i int, arr arrow.Array) (spell.Speller, error) {
	if b, ok := arr.(*array.Binary); ok && i < c.raw {
		return func(dst []byte, i int) ([]byte, bool) { return append(dst, b.Value(i)...), b.IsNull(i) }, nil
	}
	return spell.Plain(arr)
}

// Head implements textrows.Composer: all but a line's end of the row's own.
func (c *composer) Head(kept []byte) int {
	if c.respell {
		return 0
	}
	return len(kept) - len(lineEnd(kept))
}

// lineEnd is the LF or CR LF that a row ends with.
func lineEnd(row []byte) []byte {
	text, ends := bytes.CutSuffix(row, []byte("\n"))
	if !ends {
		return nil
	}
	return row[len(bytes.TrimSuffix(text, []byte("\r"))):]
}

// AppendRest implements textrows.Composer: the cells behind the hidden column, or all of them when the row has no bytes of
// its own.
func (c *composer) AppendRest(dst, kept []byte, head int, spellers []spell.Speller, i int) []byte {
	newline, from := c.manner.newline, 0
	if kept != nil && !c.respell {
		from = c.raw + 1
		if head < len(kept) {
			newline = string(kept[head:])
		}
	}
	for k := from; k < len(spellers); k++ {
		if k == c.raw {
			continue
		}
		dst = c.separate(dst, k)
		lo := len(dst)
		var null bool
		if dst, null = spellers[k](dst, i); !null || len(spellers) == 1 { // a blank line would be no row
			dst = c.quote(dst, lo)
		}
	}
	return append(dst, newline...)
}

// separate appends the delimiter in front of column i.
func (c *composer) separate(dst []byte, i int) []byte {
	if i > 0 {
		dst = append(dst, c.manner.delimiter)
	}
	return dst
}

// quote puts the cell at the end of dst, from lo on, into quotes when it needs them: when it is empty, which without them
// means null, and when it holds a delimiter, a quote or a line's end.
func (c *composer) quote(dst []byte, lo int) []byte {
	cell := dst[lo:]
	if len(cell) == 0 {
		return append(dst, `""`...)
	}
	if !c.needsQuotes(cell) {
		return dst
	}
	more := 2 + bytes.Count(cell, []byte{'"'})
	for range more {
		dst = append(dst, '"')
	}
	to := len(dst) - 1 // the closing quote stands there
	for from := to - more; from >= lo; from-- {
		to--
		dst[to] = dst[from]
		if dst[from] == '"' {
			to--
			dst[to] = '"'
		}
	}
	dst[lo] = '"'
	return dst
}

func (c *composer) needsQuotes(cell []byte) bool {
	for _, b := range cell {
		if c.need[b] {
			return true
		}
	}
	return false
}
