package jsonlines

import (
	"slices"

	"github.com/apache/arrow/go/v16/arrow"

	"labelweir/connectors/internal/column"
	"labelweir/connectors/internal/textrows"
	"labelweir/connectors/jsonlines/internal/scan"
	"labelweir/connectors/table"
)

// batch collects the members of a file's lines; it implements textrows.Rows.
type batch struct {
	*lines
	finder *finder
	opt    table.ReadOptions

	cells []cells
	raw   column.Text
}

func open(f table.File, opt table.ReadOptions) (table.Reader, error) {
	peeked := newLines(f, opt.MostRow)
	mark, err := peeked.begin(f)
	if err != nil {
		return nil, err
	}
	var c *columns
	if opt.Like != nil {
		c = likeColumns(opt.Like)
	} else if c, err = infer(peeked, opt.Peek); err != nil {
		return nil, err
	}
	b := &batch{lines: newLines(f, opt.MostRow), finder: newFinder(c), opt: opt, cells: make([]cells, len(c.names))}
	b.Feed.Restart(int64(len(mark)))
	width := 1
	for i, dt := range c.types {
		b.cells[i] = newCells(c.names[i], dt, slices.Contains(opt.Text, c.names[i]))
		width += max(1, b.cells[i].vectors.Size)
	}
	return textrows.NewReader(textrows.Table{Cursor: &b.Cursor, Rows: b, Schema: c.schema(), Manner: manner{mark: mark},
		Row: "line", Width: width}, opt), nil
}

// Take implements textrows.Rows.
func (b *batch) Take(n int) (reason string) {
	members := b.scan.Members
	if reason = b.finder.find(b.Row, members); reason != "" {
		return reason
	}
	for c := range b.cells {
		if m := b.finder.found[c]; m < 0 || members[m].Kind == scan.Null {
			b.cells[c].appendNull()
		} else if reason = b.cells[c].append(b.Row, members[m]); reason != "" {
			for k := range b.cells {
				b.cells[k].cut(n)
			}
			return reason
		}
	}
	b.raw.Append(b.Row)
	return ""
}

// Columns implements textrows.Rows.
func (b *batch) Columns() []arrow.Array {
	arrs := make([]arrow.Array, 0, len(b.cells)+1)
	for i := range b.cells {
		arrs = append(arrs, b.cells[i].take(b.opt))
	}
	return append(arrs, b.raw.Take(arrow.BinaryTypes.Binary, b.opt.Memory))
}
