package jsonlines

import (
	"bytes"
	"fmt"
	"slices"

	"labelweir/connectors/jsonlines/internal/scan"
)

// finder tells which member of a line belongs to which column.
type finder struct {
	columns *columns
	found   []int32 // index of the column's member in the line at hand, −1: it has none
	order   []int32 // column of each member of the line before, −1: none

	others []scan.Place // names of the line that are no columns
	name   []byte       // scratch
}

func newFinder(c *columns) *finder {
	return &finder{columns: c, found: make([]int32, len(c.names))}
}

// find sets found. A name that the line repeats is a reason not to read it.
func (f *finder) find(line []byte, members []scan.Member) (reason string) {
	for i := range f.found {
		f.found[i] = -1
	}
	f.others = f.others[:0]
	for i, m := range members {
		c := f.column(line, i, m.Key)
		switch {
		case c < 0:
			f.others = append(f.others, m.Key)
		case f.found[c] >= 0:
			return fmt.Sprintf("repeats the member %q, at byte %d of the line", f.columns.names[c], m.Key.Lo)
		default:
			f.found[c] = int32(i)
		}
	}
	return f.repeated(line)
}

// column is the column of the i-th member's name, −1 for none. Lines mostly have their members in one order.
func (f *finder) column(line []byte, i int, key scan.Place) int32 {
	if !key.Escaped && i < len(f.order) {
		if c := f.order[i]; c >= 0 && string(line[key.Lo:key.Hi]) == f.columns.names[c] {
			return c
		}
	}
	var text []byte
	text, f.name = textOf(line, key, f.name)
	c := int32(-1)
	if k, ok := f.columns.index[string(text)]; ok {
		c = int32(k)
	}
	for len(f.order) <= i {
		f.order = append(f.order, -1)
	}
	f.order[i] = c
	return c
}

// repeated looks for a name that stands twice among those that are no columns.
func (f *finder) repeated(line []byte) string {
	if len(f.others) < 2 {
		return ""
	}
	compare := func(a, b scan.Place) int {
		if !a.Escaped && !b.Escaped {
			return bytes.Compare(line[a.Lo:a.Hi], line[b.Lo:b.Hi])
		}
		x, _ := textOf(line, a, nil)
		y, _ := textOf(line, b, nil)
		return bytes.Compare(x, y)
	}
	slices.SortStableFunc(f.others, compare)
	for i := 1; i < len(f.others); i++ {
		if p := f.others[i]; compare(f.others[i-1], p) == 0 {
			name, _ := textOf(line, p, nil)
			return fmt.Sprintf("repeats the member %q, at byte %d of the line", name, p.Lo)
		}
	}
	return ""
}
