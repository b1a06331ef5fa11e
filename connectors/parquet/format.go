package parquet

import (
	"io"

	"github.com/apache/arrow/go/v16/arrow"

	"labelweir/connectors/table"
)

// Format is Parquet.
func Format() table.Format {
	return table.Format{
		Name: "parquet", Title: "Parquet", Endings: []string{".parquet", ".pq"}, Magic: [][]byte{[]byte(magic)},
		Open: func(f table.File, opt table.ReadOptions) (table.Reader, error) {
			r, err := newReader(f, opt)
			if err != nil {
				return nil, err // a nil *reader must not become a Reader
			}
			return r, nil
		},
		Create: func(w io.Writer, schema *arrow.Schema, opt table.WriteOptions) (table.Writer, error) {
			wr, err := newWriter(w, schema, opt)
			if err != nil {
				return nil, err
			}
			return wr, nil
		},
	}
}
