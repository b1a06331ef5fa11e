package arrowfile

import (
	"github.com/apache/arrow/go/v16/arrow"
	"github.com/apache/arrow/go/v16/arrow/array"
	"github.com/apache/arrow/go/v16/arrow/memory"
)

// gather copies record batches of one schema and equal dictionaries, one after the other, into one.
func gather(parts []arrow.Record, mem memory.Allocator) (rec arrow.Record, err error) {
	schema := parts[0].Schema()
	cols := make([]arrow.Array, 0, schema.NumFields())
	defer func() {
		for _, c := range cols {
			c.Release()
		}
	}()
	rows := int64(0)
	for _, p := range parts {
		rows += p.NumRows()
	}
	arrs := make([]arrow.Array, len(parts))
	for i := range schema.NumFields() {
		for k, p := range parts {
			arrs[k] = p.Column(i)
		}
		col, err := concatenate(arrs, mem)
		if err != nil {
			return nil, err
		}
		cols = append(cols, col)
	}
	return array.NewRecord(schema, cols, rows), nil
}

// concatenate is array.Concatenate, except that it does not compare the dictionaries of all pieces once more.
func concatenate(arrs []arrow.Array, mem memory.Allocator) (arrow.Array, error) {
	first, ok := arrs[0].(*array.Dictionary)
	if !ok {
		return array.Concatenate(arrs, mem)
	}
	indices := make([]arrow.Array, len(arrs))
	for i, a := range arrs {
		indices[i] = a.(*array.Dictionary).Indices()
	}
	all, err := array.Concatenate(indices, mem)
	if err != nil {
		return nil, err
	}
	defer all.Release()
	return array.NewDictionaryArray(first.DataType(), all, first.Dictionary()), nil
}

// canGather tells whether arrow/go v16 concatenates a type rightly. It has nothing for unions and goes wrong on
// sliced run-end-encoded arrays; tables with such columns are written in the pieces they come in.
func canGather(dt arrow.DataType) bool {
	switch dt := dt.(type) {
	case arrow.UnionType, *arrow.RunEndEncodedType:
		return false
	case arrow.ExtensionType:
		return canGather(dt.StorageType())
	case *arrow.DictionaryType:
		return canGather(dt.ValueType)
	case arrow.NestedType:
		for _, f := range dt.Fields() {
			if !canGather(f.Type) {
				return false
			}
		}
	}
	return true
}

// dictionaries lists the dictionaries of a record batch, nested ones too, in a fixed order.
func dictionaries(rec arrow.Record) []arrow.ArrayData {
	var out []arrow.ArrayData
	var visit func(d arrow.ArrayData)
	visit = func(d arrow.ArrayData) {
		if dict, ok := d.(*array.Data); ok && plain(d.DataType()).ID() == arrow.DICTIONARY {
			out = append(out, dict.Dictionary())
			visit(dict.Dictionary())
		}
		for _, c := range d.Children() {
			visit(c)
		}
	}
	for _, c := range rec.Columns() {
		visit(c.Data())
	}
	return out
}

// How the dictionaries of two record batches compare.
type dictChange int

const (
	sameDicts  dictChange = iota
	otherDicts            // arrow's writer sees the difference
	blurDicts             // they differ by so little that arrow's writer would take them for the same
)

// compareDicts compares two lists of dictionaries of one schema.
func compareDicts(a, b []arrow.ArrayData) dictChange {
	change := sameDicts
	for i := range a {
		if a[i] == b[i] {
			continue
		}
		x, y := array.MakeFromData(a[i]), array.MakeFromData(b[i])
		nan := array.WithNaNsEqual(true)
		switch {
		case array.ApproxEqual(x, y, nan, array.WithAbsTolerance(0)):
		case array.ApproxEqual(x, y, nan):
			change = blurDicts
		case change == sameDicts:
			change = otherDicts
		}
		x.Release()
		y.Release()
	}
	return change
}
