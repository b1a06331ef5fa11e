package table

import (
	"sort"

	"github.com/apache/arrow/go/v16/arrow"
)

// fitting is how many of the first rows of a record batch take at most limit bits, at least one if there is one. It
// counts values, not buffers, so it doesn't depend on how the rows are cut into batches.
func fitting(rec arrow.Record, limit int64) int64 {
	n := int(rec.NumRows())
	if n <= 1 || sizeOfRecord(rec, n) <= limit {
		return int64(n)
	}
	return int64(max(1, sort.Search(n, func(k int) bool { return sizeOfRecord(rec, k+1) > limit })))
}

// sizeOf is the bits that n values from index lo of d take, without dictionaries. In bits, sizes of parts add up.
func sizeOf(d arrow.ArrayData, lo, n int) int64 {
	if n == 0 {
		return 0
	}
	nulls := int64(n)
	switch dt := plain(d.DataType()).(type) {
	case *arrow.StringType, *arrow.BinaryType:
		from, to := between[int32](d, lo, n)
		return nulls + 32*int64(n) + 8*(to-from)
	case *arrow.LargeStringType, *arrow.LargeBinaryType:
		from, to := between[int64](d, lo, n)
		return nulls + 64*int64(n) + 8*(to-from)
	case *arrow.ListType, *arrow.MapType:
		from, to := between[int32](d, lo, n)
		return nulls + 32*int64(n) + sizeOf(d.Children()[0], d.Children()[0].Offset()+int(from), int(to-from))
	case *arrow.LargeListType:
		from, to := between[int64](d, lo, n)
		return nulls + 64*int64(n) + sizeOf(d.Children()[0], d.Children()[0].Offset()+int(from), int(to-from))
	case *arrow.FixedSizeListType:
		c, k := d.Children()[0], int(dt.Len())
		return nulls + sizeOf(c, c.Offset()+lo*k, n*k)
	case *arrow.StructType:
		sum := nulls
		for _, c := range d.Children() {
			sum += sizeOf(c, c.Offset()+lo, n)
		}
		return sum
	case *arrow.SparseUnionType:
		sum := 8 * int64(n)
		for _, c := range d.Children() {
			sum += sizeOf(c, c.Offset()+lo, n)
		}
		return sum
	case *arrow.DenseUnionType:
		sum := 40 * int64(n)
		for i := lo; i < lo+n; i++ {
			c := d.Children()[dt.ChildIDs()[int8(d.Buffers()[1].Bytes()[i])]]
			sum += sizeOf(c, c.Offset()+int(arrow.Int32Traits.CastFromBytes(d.Buffers()[2].Bytes())[i]), 1)
		}
		return sum
	case arrow.BinaryViewDataType:
		sum := nulls + int64(8*n*arrow.ViewHeaderSizeBytes)
		for _, v := range arrow.ViewHeaderTraits.CastFromBytes(d.Buffers()[1].Bytes())[lo : lo+n] {
			sum += 8 * int64(v.Len())
		}
		return sum
	case arrow.FixedWidthDataType:
		return nulls + int64(n)*int64(dt.BitWidth())
	}
	return 128 * int64(n) // runs: a guess
}

// between gives the offsets at lo and lo+n.
func between[T int32 | int64](d arrow.ArrayData, lo, n int) (from, to int64) {
	o := arrow.GetData[T](d.Buffers()[1].Bytes())
	return int64(o[lo]), int64(o[lo+n])
}

// sizeOfRecord is the bits that the first rows of a record batch take.
func sizeOfRecord(rec arrow.Record, rows int) (sum int64) {
	for _, c := range rec.Columns() {
		sum += sizeOf(c.Data(), c.Data().Offset(), rows)
	}
	return sum
}
