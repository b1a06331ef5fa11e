package arrowfile

import (
	"errors"
	"slices"
)

// Numbers of types from Schema.fbs whose columns take other than two buffers, or have more than their name says.
const (
	typeNull       = 1
	typeBinary     = 4
	typeUtf8       = 5
	typeStruct     = 13
	typeFixedList  = 16
	typeLargeBytes = 19
	typeLargeUtf8  = 20
	typeRunEnds    = 22
	typeBytesView  = 23
	typeUtf8View   = 24
	typeListView   = 25
	typeLargeView  = 26
)

// share adds up how many field nodes and buffers of a record batch columns take, as the format has them. Arrow takes so
// many without a look at how many there are.
type share struct {
	old            bool    // before version 5: unions have a bitmap of nulls
	views          []int64 // buffers of each column of views, in turn
	nodes, buffers int
}

var errFewViews = errors.New("counts of the buffers of views are missing")

// count adds a Field table's column; asValue counts the dictionary of an encoded field instead of its indices. It panics
// with errFewViews.
func (c *share) count(f fbTable, asValue bool, depth int) {
	if depth > mostDepth {
		return // fieldsFit has refused it
	}
	c.nodes++
	if _, encoded := f.table(4); encoded && !asValue {
		c.buffers += 2
		return
	}
	switch kind := f.byte(2, 0); kind {
	case typeNull, typeRunEnds:
	case typeStruct, typeFixedList:
		c.buffers++
	case typeBinary, typeUtf8, typeLargeBytes, typeLargeUtf8, typeListView, typeLargeView:
		c.buffers += 3
	case typeBytesView, typeUtf8View:
		if len(c.views) == 0 {
			panic(errFewViews)
		}
		c.buffers += 2 + int(c.views[0])
		c.views = c.views[1:]
	case typeUnion:
		c.buffers++
		if dt, _ := f.table(3); dt.b != nil && dt.int16(0) == 1 { // dense
			c.buffers++
		}
		if c.old {
			c.buffers++
		}
	default:
		c.buffers += 2
	}
	for _, child := range f.tables(5) {
		c.count(child, false, depth+1)
	}
}

// fieldsOf are the Field tables of the schema message with that head.
func fieldsOf(head []byte) []fbTable {
	if head == nil {
		return nil
	}
	t, _ := fbRoot(head).table(2)
	return t.tables(1)
}

// encodedField is the field, or the one below it, whose values are in the dictionary of that number.
func encodedField(f fbTable, id int64, depth int) (found fbTable, ok bool) {
	if d, ok := f.table(4); ok && d.int64(0) == id {
		return f, true
	}
	ok = depth < mostDepth && slices.ContainsFunc(f.tables(5), func(child fbTable) (ok bool) {
		found, ok = encodedField(child, id, depth+1)
		return ok
	})
	return found, ok
}

// enough tells whether a record or dictionary message has as many nodes and buffers as its columns take.
func (m *messages) enough(root, rec fbTable) error {
	c := share{old: root.int16(0) < 4, views: rec.int64s(4)}
	if root.byte(1, 0) == headerRecord {
		for _, f := range fieldsOf(m.schema) {
			c.count(f, false, 0)
		}
	} else {
		dict, _ := root.table(2)
		for _, f := range fieldsOf(m.schema) {
			if found, ok := encodedField(f, dict.int64(0), 0); ok {
				c.count(found, true, 0)
				break // the same dictionary may serve several fields of one type
			}
		}
	}
	_, nodes := rec.vector(1)
	if _, buffers := rec.vector(2); nodes < c.nodes || buffers < c.buffers {
		return errors.New("there are fewer buffers than its columns take")
	}
	return nil
}
