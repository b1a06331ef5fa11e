package parquet

import (
	"github.com/apache/arrow/go/v16/arrow"
	"github.com/apache/arrow/go/v16/arrow/array"
	"github.com/apache/arrow/go/v16/arrow/memory"
)

// loosened is the schema as the library is made to see it. Parquet stores lists of one size and of any size alike, and
// durations as integers, but the library writes no null among the former, and none of the latter, of views, and of lists
// with long offsets.
func loosened(schema *arrow.Schema) *arrow.Schema {
	fields := append([]arrow.Field(nil), schema.Fields()...)
	for i, f := range fields {
		fields[i].Type = loosenedType(f.Type)
	}
	meta := schema.Metadata()
	return arrow.NewSchema(fields, &meta)
}

func loosenedType(dt arrow.DataType) arrow.DataType {
	switch dt := dt.(type) {
	case *arrow.FixedSizeListType:
		return arrow.ListOfField(dt.ElemField())
	case *arrow.LargeListType:
		return arrow.ListOfField(dt.ElemField())
	case *arrow.DurationType:
		return arrow.PrimitiveTypes.Int64
	case *arrow.StringViewType:
		return arrow.BinaryTypes.String
	case *arrow.BinaryViewType:
		return arrow.BinaryTypes.Binary
	}
	return dt
}

// loosen gives the columns of a record batch the types of the loosened schema. The caller releases the batch.
func loosen(rec arrow.Record, schema *arrow.Schema, mem memory.Allocator) (arrow.Record, error) {
	cols := make([]arrow.Array, 0, rec.NumCols())
	defer func() {
		for _, c := range cols {
			c.Release()
		}
	}()
	for _, c := range rec.Columns() {
		col, err := loosenColumn(c, mem)
		if err != nil {
			return nil, err
		}
		cols = append(cols, col)
	}
	return array.NewRecord(schema, cols, rec.NumRows()), nil
}

func loosenColumn(c arrow.Array, mem memory.Allocator) (arrow.Array, error) {
	switch a := c.(type) {
	case *array.FixedSizeList:
		return listed(a, a.ListValues(), mem)
	case *array.LargeList:
		return listed(a, a.ListValues(), mem)
	case *array.List:
		if a.NullN() > 0 {
			return listed(a, a.ListValues(), mem)
		}
	case *array.Duration:
		return retyped(a, arrow.PrimitiveTypes.Int64), nil
	case *array.StringView:
		b := array.NewStringBuilder(mem)
		defer b.Release()
		return unviewed(b, a.IsNull, func(i int) { b.Append(a.Value(i)) }, a.Len()), nil
	case *array.BinaryView:
		b := array.NewBinaryBuilder(mem, arrow.BinaryTypes.Binary)
		defer b.Release()
		return unviewed(b, a.IsNull, func(i int) { b.Append(a.Value(i)) }, a.Len()), nil
	}
	c.Retain()
	return c, nil
}

// retyped is an array of fixed width with the same bytes as another type.
func retyped(arr arrow.Array, dt arrow.DataType) arrow.Array {
	d := arr.Data()
	data := array.NewData(dt, d.Len(), d.Buffers(), nil, d.NullN(), d.Offset())
	defer data.Release()
	return array.MakeFromData(data)
}

// unviewed copies views into plain offsets.
func unviewed(b array.Builder, null func(int) bool, add func(int), rows int) arrow.Array {
	for i := range rows {
		if null(i) {
			b.AppendNull()
		} else {
			add(i)
		}
	}
	return b.NewArray()
}
