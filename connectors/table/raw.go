package table

import (
	"slices"

	"github.com/apache/arrow/go/v16/arrow"
)

// RawKey is the metadata key of the field of a hidden column that holds each row's bytes as they stand in the file,
// without the line's end. Its value is the Name of the format.
const RawKey = "labelweir.raw"

// RawField is the field of the hidden column of a format. Readers put it behind all others. A Writer finds it before
// the tags when the input has its own format, and never otherwise.
func RawField(format string) arrow.Field {
	return arrow.Field{Type: arrow.BinaryTypes.Binary, Metadata: arrow.NewMetadata([]string{RawKey}, []string{format})}
}

// RawIndex is the index of the hidden column of a schema, −1 when it has none.
func RawIndex(schema *arrow.Schema) int {
	for i, f := range schema.Fields() {
		if f.Metadata.FindKey(RawKey) >= 0 {
			return i
		}
	}
	return -1
}

// visible are the fields of a schema but the hidden one.
func visible(schema *arrow.Schema) []arrow.Field {
	fields := schema.Fields()
	if i := RawIndex(schema); i >= 0 {
		fields = slices.Delete(slices.Clone(fields), i, i+1)
	}
	return fields
}

// rawFormat is the format whose bytes the hidden column holds, "" when there is none.
func rawFormat(schema *arrow.Schema) string {
	i := RawIndex(schema)
	if i < 0 {
		return ""
	}
	name, _ := schema.Field(i).Metadata.GetValue(RawKey)
	return name
}
