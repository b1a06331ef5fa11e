package parquet

import (
	"fmt"

	"github.com/apache/arrow/go/v16/arrow"
	"github.com/apache/arrow/go/v16/arrow/array"
	"github.com/apache/arrow/go/v16/arrow/bitutil"
	"github.com/apache/arrow/go/v16/arrow/memory"
)

// loosen has columns of lists of one size read as lists of any size: a list that is null has no elements in Parquet, and
// the library refuses it. It returns the columns' types by their index.
func (r *reader) loosen() map[int]*arrow.FixedSizeListType {
	fixed := map[int]*arrow.FixedSizeListType{}
	for i := range r.fr.Manifest.Fields {
		f := r.fr.Manifest.Fields[i].Field
		if dt, ok := f.Type.(*arrow.FixedSizeListType); ok {
			fixed[i] = dt
			f.Type = arrow.ListOfField(dt.ElemField())
		}
	}
	return fixed
}

// tighten makes lists of one size of lists; elements of those that are null are zero.
func tighten(lists *array.List, dt *arrow.FixedSizeListType, mem memory.Allocator) (arrow.Array, error) {
	n, size := lists.Len(), int(dt.Len())
	offsets := lists.Offsets()[lists.Data().Offset():]
	for i := range n {
		if have := int(offsets[i+1] - offsets[i]); have != size && lists.IsValid(i) {
			return nil, fmt.Errorf("a list of %d elements in row %d of the batch instead of %d", have, i+1, size)
		}
	}
	values, err := spread(lists, offsets, size, mem)
	if err != nil {
		return nil, err
	}
	defer values.Release()
	var valid *memory.Buffer
	if lists.NullN() > 0 {
		valid = memory.NewResizableBuffer(mem)
		defer valid.Release()
		valid.Resize(int(bitutil.BytesForBits(int64(n))))
		clear(valid.Bytes())
		bitutil.CopyBitmap(lists.NullBitmapBytes(), lists.Data().Offset(), n, valid.Bytes(), 0)
	}
	data := array.NewData(dt, n, []*memory.Buffer{valid}, []arrow.ArrayData{values.Data()}, lists.NullN(), 0)
	defer data.Release()
	return array.MakeFromData(data), nil
}

// spread gives the elements with size zeros in the place of each list that is null.
func spread(lists *array.List, offsets []int32, size int, mem memory.Allocator) (arrow.Array, error) {
	all, n := lists.ListValues(), lists.Len()
	if lists.NullN() == 0 {
		return array.NewSlice(all, int64(offsets[0]), int64(offsets[n])), nil
	}
	var parts []arrow.Array
	defer func() {
		for _, p := range parts {
			p.Release()
		}
	}()
	zeros := blank(all.DataType(), size, mem)
	defer zeros.Release()
	for i := 0; i < n; {
		from := i
		for i < n && lists.IsValid(i) {
			i++
		}
		if i > from {
			parts = append(parts, array.NewSlice(all, int64(offsets[from]), int64(offsets[i])))
		}
		for i < n && lists.IsNull(i) {
			zeros.Retain()
			parts = append(parts, zeros)
			i++
		}
	}
	return array.Concatenate(parts, mem)
}

// blank is so many values of a type that mean nothing.
func blank(dt arrow.DataType, size int, mem memory.Allocator) arrow.Array {
	b := array.NewBuilder(mem, dt)
	defer b.Release()
	b.AppendEmptyValues(size)
	return b.NewArray()
}
