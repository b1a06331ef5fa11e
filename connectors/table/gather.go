package table

import (
	"github.com/apache/arrow/go/v16/arrow"
	"github.com/apache/arrow/go/v16/arrow/array"
	"github.com/apache/arrow/go/v16/arrow/memory"
)

// gather puts record batches of one schema and equal dictionaries, one after the other, into one. It copies what does not
// stand there like that already.
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
		col, ok := adjoined(arrs, int(rows))
		if !ok {
			var err error
			if col, err = concatenate(arrs, mem); err != nil {
				return nil, err
			}
		}
		cols = append(cols, col)
	}
	return array.NewRecord(schema, cols, rows), nil
}

// concatenate is array.Concatenate with what it lacks: unions, slices of run-end-encoded arrays, and dictionaries
// without comparing those of all pieces once more.
func concatenate(arrs []arrow.Array, mem memory.Allocator) (arrow.Array, error) {
	switch first := arrs[0].(type) {
	case *array.Dictionary:
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
	case *array.SparseUnion, *array.DenseUnion:
		return concatenateUnions(arrs, mem)
	case *array.RunEndEncoded:
		return concatenateRuns(arrs, mem)
	case array.ExtensionArray:
		storage := make([]arrow.Array, len(arrs))
		for i, a := range arrs {
			storage[i] = a.(array.ExtensionArray).Storage()
		}
		all, err := concatenate(storage, mem)
		if err != nil {
			return nil, err
		}
		defer all.Release()
		return array.NewExtensionArrayWithStorage(first.DataType().(arrow.ExtensionType), all), nil
	}
	return array.Concatenate(arrs, mem)
}

// canGather tells whether concatenate knows a type: all but unions and run-end-encoded values inside lists, maps and
// structs.
func canGather(dt arrow.DataType) bool {
	switch dt := dt.(type) {
	case arrow.ExtensionType:
		return canGather(dt.StorageType())
	case *arrow.RunEndEncodedType:
		return canGather(dt.Encoded())
	case *arrow.DictionaryType:
		return true
	case arrow.UnionType:
		return gatherChildren(dt.Fields(), canGather)
	case arrow.NestedType:
		return gatherChildren(dt.Fields(), func(dt arrow.DataType) bool {
			_, union := plain(dt).(arrow.UnionType)
			return !union && plain(dt).ID() != arrow.RUN_END_ENCODED && canGather(dt)
		})
	}
	return true
}

func gatherChildren(fields []arrow.Field, can func(arrow.DataType) bool) bool {
	for _, f := range fields {
		if !can(f.Type) {
			return false
		}
	}
	return true
}

// Dictionaries lists the dictionaries of a record batch, nested ones too, in a fixed order.
func Dictionaries(rec arrow.Record) []arrow.ArrayData {
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

// equalDicts tells whether two lists of dictionaries of one schema hold the same values.
func equalDicts(a, b []arrow.ArrayData) bool {
	for i := range a {
		if a[i] == b[i] {
			continue
		}
		x, y := array.MakeFromData(a[i]), array.MakeFromData(b[i])
		same := array.ApproxEqual(x, y, array.WithNaNsEqual(true), array.WithAbsTolerance(0))
		x.Release()
		y.Release()
		if !same {
			return false
		}
	}
	return true
}
