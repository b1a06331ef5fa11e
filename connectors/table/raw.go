package table

import "github.com/apache/arrow/go/v16/arrow"

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

// shown is how many columns of a schema are not hidden.
func shown(schema *arrow.Schema) int {
	if RawIndex(schema) >= 0 {
		return schema.NumFields() - 1
	}
	return schema.NumFields()
}
