package parquet

import (
	"slices"

	"github.com/apache/arrow/go/v16/arrow"
)

const fieldID = "PARQUET:field_id"

// tidied is the schema as it was meant: without numbers of fields that have none, which the library adds, and with
// durations where the schema in the footer has them.
func tidied(schema, origin *arrow.Schema) *arrow.Schema {
	fields := make([]arrow.Field, schema.NumFields())
	for i, f := range schema.Fields() {
		if origin != nil && origin.Field(i).Type.ID() == arrow.DURATION && f.Type.ID() == arrow.INT64 {
			f.Type = origin.Field(i).Type
		}
		fields[i] = tidiedField(f)
	}
	meta := schema.Metadata()
	return arrow.NewSchema(fields, &meta)
}

func tidiedField(f arrow.Field) arrow.Field {
	keys, values := f.Metadata.Keys(), f.Metadata.Values()
	if i := slices.Index(keys, fieldID); i >= 0 && values[i] == "-1" {
		f.Metadata = arrow.NewMetadata(slices.Delete(slices.Clone(keys), i, i+1), slices.Delete(slices.Clone(values), i, i+1))
	}
	switch dt := f.Type.(type) {
	case *arrow.ListType:
		f.Type = arrow.ListOfField(tidiedField(dt.ElemField()))
	case *arrow.FixedSizeListType:
		f.Type = arrow.FixedSizeListOfField(dt.Len(), tidiedField(dt.ElemField()))
	case *arrow.StructType:
		fields := make([]arrow.Field, dt.NumFields())
		for i, child := range dt.Fields() {
			fields[i] = tidiedField(child)
		}
		f.Type = arrow.StructOf(fields...)
	}
	return f
}

// as gives an array the type that its schema has for it.
func as(arr arrow.Array, dt arrow.DataType) arrow.Array {
	if dt.ID() != arrow.DURATION || arr.DataType().ID() != arrow.INT64 {
		arr.Retain()
		return arr
	}
	return retyped(arr, dt)
}
