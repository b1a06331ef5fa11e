package parquet

import (
	"errors"
	"math"

	"github.com/apache/arrow/go/v16/arrow"
	"github.com/apache/arrow/go/v16/arrow/array"
	"github.com/apache/arrow/go/v16/arrow/bitutil"
	"github.com/apache/arrow/go/v16/arrow/memory"
)

// ranger is a list array of either kind.
type ranger interface {
	arrow.Array
	ValueOffsets(i int) (start, end int64)
}

// listed makes a list array in which lists that are null have no elements.
func listed(a ranger, values arrow.Array, mem memory.Allocator) (arrow.Array, error) {
	n := a.Len()
	offsets := memory.NewResizableBuffer(mem)
	defer offsets.Release()
	offsets.Resize(4 * (n + 1))
	to := arrow.Int32Traits.CastFromBytes(offsets.Bytes())
	var parts []arrow.Array
	defer func() {
		for _, p := range parts {
			p.Release()
		}
	}()
	at, from, until := int64(0), int64(0), int64(0) // elements so far; the run of elements being made longer
	flush := func() {
		if until > from {
			parts = append(parts, array.NewSlice(values, from, until))
		}
	}
	to[0] = 0
	for i := range n {
		if a.IsValid(i) {
			start, end := a.ValueOffsets(i)
			if start != until {
				flush()
				from = start
			}
			until = end
			at += end - start
		}
		if at > math.MaxInt32 {
			return nil, errors.New("lists of more than 2147483647 elements in all")
		}
		to[i+1] = int32(at)
	}
	flush()
	elements, err := joined(parts, values, mem)
	if err != nil {
		return nil, err
	}
	defer elements.Release()
	var valid *memory.Buffer
	if a.NullN() > 0 {
		valid = memory.NewResizableBuffer(mem)
		defer valid.Release()
		valid.Resize(int(bitutil.BytesForBits(int64(n))))
		clear(valid.Bytes())
		bitutil.CopyBitmap(a.NullBitmapBytes(), a.Data().Offset(), n, valid.Bytes(), 0)
	}
	dt := arrow.ListOfField(a.DataType().(arrow.ListLikeType).ElemField())
	data := array.NewData(dt, n, []*memory.Buffer{valid, offsets}, []arrow.ArrayData{elements.Data()}, a.NullN(), 0)
	defer data.Release()
	return array.MakeFromData(data), nil
}

// joined makes one array of slices of values.
func joined(parts []arrow.Array, values arrow.Array, mem memory.Allocator) (arrow.Array, error) {
	switch len(parts) {
	case 0:
		return array.NewSlice(values, 0, 0), nil
	case 1:
		parts[0].Retain()
		return parts[0], nil
	}
	return array.Concatenate(parts, mem)
}
