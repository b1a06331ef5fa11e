package table

import (
	"github.com/apache/arrow/go/v16/arrow"
	"github.com/apache/arrow/go/v16/arrow/array"
)

// aligned is a count of rows of which any multiple fills the last 64 bytes of a buffer, bitmaps too. Writers pad what
// they write; behind a slice with a last part that is not full they find its neighbours, behind a copy they find zeros.
const aligned = 512

// adjoined makes one array of slices of one, in order and without gaps, without copying. ok is false when they are not,
// or when what is written would depend on whether they are. The caller releases the array.
func adjoined(slices []arrow.Array, rows int) (arr arrow.Array, ok bool) {
	if rows%aligned != 0 || !adjoinable(slices[0].DataType()) {
		return nil, false
	}
	first, ok := slices[0].Data().(*array.Data)
	if !ok {
		return nil, false
	}
	next, nulls := first.Offset(), 0
	for _, a := range slices {
		d, ok := a.Data().(*array.Data)
		if !ok || d.Offset() != next || !sameMemory(first, d) {
			return nil, false
		}
		next += d.Len()
		nulls += a.NullN()
	}
	var dict *array.Data
	if first.DataType().ID() == arrow.DICTIONARY {
		dict = first.Dictionary().(*array.Data)
	}
	data := array.NewDataWithDictionary(first.DataType(), rows, first.Buffers(), nulls, first.Offset(), dict)
	defer data.Release()
	return array.MakeFromData(data), true
}

// adjoinable tells whether values of a type stand in whole bytes of one buffer.
func adjoinable(dt arrow.DataType) bool {
	switch dt.(type) {
	case *arrow.BooleanType, arrow.NestedType, arrow.ExtensionType:
		return false
	}
	_, ok := dt.(arrow.FixedWidthDataType)
	return ok
}

// sameMemory tells whether two slices share their buffers and their dictionary.
func sameMemory(a, b *array.Data) bool {
	if a.DataType().ID() == arrow.DICTIONARY && a.Dictionary() != b.Dictionary() || len(a.Buffers()) != len(b.Buffers()) {
		return false
	}
	for i, buf := range a.Buffers() {
		if buf != b.Buffers()[i] {
			return false
		}
	}
	return true
}
