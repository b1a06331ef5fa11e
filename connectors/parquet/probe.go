package parquet

import (
	"github.com/apache/arrow/go/v16/arrow"
	"github.com/apache/arrow/go/v16/parquet/file"
	"github.com/apache/arrow/go/v16/parquet/pqarrow"

	"labelweir/connectors/table"
)

// probe reads the columns below a struct of the row group once on this goroutine. The library reads them on goroutines
// of its own, whose panics over damaged bytes nobody can catch; what has been read here holds there, too.
func (r *reader) probe(i int) (err error) {
	field := r.fr.Manifest.Fields[i]
	if !hasStruct(field.Field.Type) {
		return nil
	}
	defer func() {
		if p := recover(); p != nil {
			err = table.Caught(p)
		}
	}()
	for _, leaf := range leavesOf(field, nil) {
		if err := r.probeLeaf(leaf); err != nil {
			return err
		}
	}
	return nil
}

// probeLeaf reads one Parquet column the way its batches will be read.
func (r *reader) probeLeaf(leaf pqarrow.SchemaField) error {
	rr := file.NewRecordReader(r.pf.MetaData().Schema.Column(leaf.ColIndex), leaf.LevelInfo, leaf.Field.Type, r.mem, r.pf.BufferPool())
	defer rr.Release()
	pages, err := r.pf.RowGroup(r.group - 1).GetColumnPageReader(leaf.ColIndex)
	if err != nil {
		return err
	}
	rr.SetPageReader(pages)
	for left := r.left; left > 0; {
		n := min(left, r.step)
		rr.Reset()
		if err := rr.Reserve(n); err != nil {
			return err
		}
		for batch := n; batch > 0 && rr.HasMore(); {
			read, err := rr.ReadRecords(batch)
			if err != nil || read == 0 {
				return err
			}
			batch -= read
		}
		if b, ok := rr.(file.BinaryRecordReader); ok {
			for _, chunk := range b.GetBuilderChunks() {
				chunk.Release()
			}
		}
		left -= n
	}
	return nil
}

// hasStruct tells whether a type is, or has somewhere within, a struct; maps are lists of structs.
func hasStruct(dt arrow.DataType) bool {
	switch dt := dt.(type) {
	case *arrow.StructType, *arrow.MapType:
		return true
	case arrow.ListLikeType:
		return hasStruct(dt.Elem())
	}
	return false
}

// leavesOf appends the Parquet columns of a field.
func leavesOf(f pqarrow.SchemaField, list []pqarrow.SchemaField) []pqarrow.SchemaField {
	if len(f.Children) == 0 {
		return append(list, f)
	}
	for _, c := range f.Children {
		list = leavesOf(c, list)
	}
	return list
}
