package jsonlines

import (
	"fmt"
	"math"

	"github.com/apache/arrow/go/v16/arrow"

	"labelweir/connectors/internal/column"
	"labelweir/connectors/jsonlines/internal/scan"
	"labelweir/connectors/table"
)

// cells collects the values of one column.
type cells struct {
	name    string
	dt      arrow.DataType
	must    bool // be text: no arrays or objects
	json    bool // values are kept as JSON, quotes and all
	vector  *arrow.FixedSizeListType
	text    column.Text
	vectors column.Vectors
	scratch []float64
}

func newCells(name string, dt arrow.DataType, must bool) cells {
	c := cells{name: name, dt: dt, must: must}
	switch t := dt.(type) {
	case *arrow.FixedSizeListType:
		c.vector, c.vectors.Size = t, int(t.Len())
	case *table.CellType:
		c.json = arrow.IsNested(t.Means.ID())
	}
	return c
}

// append takes a value that is not null, or gives the reason why it can't be used.
func (c *cells) append(line []byte, m scan.Member) (reason string) {
	value := line[m.Value.Lo:m.Value.Hi]
	switch {
	case c.vector != nil:
		return c.appendVector(value, m)
	case m.Kind == scan.String && c.json:
		c.text.Append(line[m.Value.Lo-1 : m.Value.Hi+1])
	case m.Kind == scan.String && m.Value.Escaped:
		c.text.End(scan.Unescape(c.text.Begin(), value))
	case c.must && m.Kind == scan.Array, c.must && m.Kind == scan.Object:
		return fmt.Sprintf("has %s where %q should have a name or number, at byte %d of the line", kindName(m.Kind), c.name, place(m))
	default:
		c.text.Append(value)
	}
	return ""
}

func (c *cells) appendVector(value []byte, m scan.Member) (reason string) {
	if m.Kind != scan.Array {
		return fmt.Sprintf("has %s where %q should have %d numbers, at byte %d of the line", kindName(m.Kind), c.name, c.vectors.Size, place(m))
	}
	var ok bool
	c.scratch, ok = scan.Numbers(c.scratch[:0], value, math.NaN(), mostNumbers)
	switch {
	case !ok:
		return fmt.Sprintf("has more than numbers in the array %q, at byte %d of the line", c.name, place(m))
	case len(c.scratch) != c.vectors.Size:
		return fmt.Sprintf("has %d numbers in the array %q, not %d, at byte %d of the line", len(c.scratch), c.name, c.vectors.Size, place(m))
	}
	c.vectors.Append(c.scratch)
	return ""
}

// place is where a value begins in its line, counted from 1.
func place(m scan.Member) int32 {
	if m.Kind == scan.String {
		return m.Value.Lo // the quote stands before it
	}
	return m.Value.Lo + 1
}

func kindName(k scan.Kind) string {
	return [...]string{"null", "true or false", "a number", "text", "an array", "an object"}[k]
}

func (c *cells) appendNull() {
	if c.vector != nil {
		c.vectors.AppendNull()
	} else {
		c.text.AppendNull()
	}
}

// cut takes off all values from the n-th on.
func (c *cells) cut(n int) {
	c.vectors.Cut(n)
	c.text.Cut(n)
}

// take makes an array of the values.
func (c *cells) take(opt table.ReadOptions) arrow.Array {
	if c.vector != nil {
		return c.vectors.Take(c.vector, opt.Memory)
	}
	return c.text.Take(c.dt, opt.Memory)
}
