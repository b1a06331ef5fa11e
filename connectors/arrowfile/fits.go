package arrowfile

import (
	"bytes"

	"github.com/apache/arrow/go/v16/arrow"

	"labelweir/connectors/table"
)

// SchemaFits looks at the lengths in the bytes of an Arrow stream's schema, as other formats keep it, before arrow
// believes them.
func SchemaFits(b []byte) (err error) {
	defer func() {
		if p := recover(); p != nil {
			err = table.Caught(p)
		}
	}()
	m, err := newMessages(bytes.NewReader(b), int64(len(b)))
	if err != nil {
		return err
	}
	if m.format != Stream {
		return errNotArrow
	}
	_, err = m.Message()
	m.Release()
	return err
}

// ValuesFit looks at the offsets and indices of an array that comes from bytes nobody has looked at.
func ValuesFit(arr arrow.Array) error {
	r := &reader{dicts: map[arrow.ArrayData]bool{}}
	return r.validateData(arr.Data())
}
