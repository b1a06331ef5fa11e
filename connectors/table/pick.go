package table

import (
	"github.com/apache/arrow/go/v16/arrow"
	"github.com/apache/arrow/go/v16/arrow/array"
	"github.com/apache/arrow/go/v16/arrow/bitutil"
	"github.com/apache/arrow/go/v16/arrow/memory"
)

// run is rows lo ≤ i < hi of a batch.
type run struct{ lo, hi int64 }

// pick copies runs of rows of a record batch into one of their own. Columns of fixed width and text are copied
// directly; a slice a run and column, as the rest needs, costs ten times as much when a few rows in a hundred are left
// out.
func pick(rec arrow.Record, runs []run, mem memory.Allocator) (arrow.Record, error) {
	rows := int64(0)
	for _, r := range runs {
		rows += r.hi - r.lo
	}
	cols := make([]arrow.Array, 0, rec.NumCols())
	defer func() {
		for _, c := range cols {
			c.Release()
		}
	}()
	for _, c := range rec.Columns() {
		col, err := pickColumn(c, runs, int(rows), mem)
		if err != nil {
			return nil, err
		}
		cols = append(cols, col)
	}
	return array.NewRecord(rec.Schema(), cols, rows), nil
}

func pickColumn(arr arrow.Array, runs []run, rows int, mem memory.Allocator) (arrow.Array, error) {
	switch dt := plain(arr.DataType()).(type) {
	case *arrow.DictionaryType:
		return pickFixed(arr, runs, rows, dt.IndexType.(arrow.FixedWidthDataType).Bytes(), mem), nil
	case *arrow.BooleanType:
		return picked(arr, runs, rows, mem, pickBits(arr.Data(), 1, runs, rows, mem)), nil
	case *arrow.StringType, *arrow.BinaryType:
		return pickText[int32](arr, runs, rows, mem), nil
	case *arrow.LargeStringType, *arrow.LargeBinaryType:
		return pickText[int64](arr, runs, rows, mem), nil
	case arrow.NestedType:
	case arrow.FixedWidthDataType:
		return pickFixed(arr, runs, rows, dt.Bytes(), mem), nil
	}
	parts := make([]arrow.Array, len(runs))
	for i, r := range runs {
		parts[i] = array.NewSlice(arr, r.lo, r.hi)
		defer parts[i].Release()
	}
	return concatenate(parts, mem)
}

// picked makes the array of the buffers picked, with the null bitmap that belongs to them, and releases them.
func picked(arr arrow.Array, runs []run, rows int, mem memory.Allocator, buffers ...*memory.Buffer) arrow.Array {
	d := arr.Data().(*array.Data)
	all := append([]*memory.Buffer{nil}, buffers...)
	nulls := 0
	if arr.NullN() > 0 { // of the array: the data of a slice does not know
		all[0], nulls = pickBits(d, 0, runs, rows, mem), array.UnknownNullCount
	}
	defer memory.ReleaseBuffers(all)
	var dict *array.Data
	if plain(d.DataType()).ID() == arrow.DICTIONARY {
		dict = d.Dictionary().(*array.Data)
	}
	out := array.NewDataWithDictionary(d.DataType(), rows, all, nulls, 0, dict)
	defer out.Release()
	return array.MakeFromData(out)
}

// pickBits picks from a buffer of one bit a row.
func pickBits(d arrow.ArrayData, buffer int, runs []run, rows int, mem memory.Allocator) *memory.Buffer {
	bits := memory.NewResizableBuffer(mem)
	bits.Resize(int(bitutil.BytesForBits(int64(rows))))
	if rows == 0 {
		return bits
	}
	clear(bits.Bytes())
	at, src := 0, d.Buffers()[buffer].Bytes()
	for _, r := range runs {
		n := int(r.hi - r.lo)
		bitutil.CopyBitmap(src, d.Offset()+int(r.lo), n, bits.Bytes(), at)
		at += n
	}
	return bits
}

func pickFixed(arr arrow.Array, runs []run, rows, width int, mem memory.Allocator) arrow.Array {
	values := memory.NewResizableBuffer(mem)
	values.Resize(rows * width)
	if rows > 0 && width > 0 {
		d := arr.Data()
		dst, src := values.Bytes(), d.Buffers()[1].Bytes()[d.Offset()*width:]
		for _, r := range runs {
			dst = dst[copy(dst, src[int(r.lo)*width:int(r.hi)*width]):]
		}
	}
	return picked(arr, runs, rows, mem, values)
}

func pickText[T int32 | int64](arr arrow.Array, runs []run, rows int, mem memory.Allocator) arrow.Array {
	d := arr.Data()
	size, offsets, values := 0, memory.NewResizableBuffer(mem), memory.NewResizableBuffer(mem)
	var zero T
	width := arrow.GetDataType[T]().(arrow.FixedWidthDataType).Bytes()
	offsets.Resize((rows + 1) * width)
	to := arrow.GetData[T](offsets.Bytes())
	to[0] = zero
	if rows > 0 {
		from := arrow.GetData[T](d.Buffers()[1].Bytes())[d.Offset():]
		for _, r := range runs {
			size += int(from[r.hi] - from[r.lo])
		}
		values.Resize(size)
		dst, row := values.Bytes(), 1
		for _, r := range runs {
			shift := to[row-1] - from[r.lo]
			for _, o := range from[r.lo+1 : r.hi+1] {
				to[row] = o + shift
				row++
			}
			if from[r.hi] > from[r.lo] {
				dst = dst[copy(dst, d.Buffers()[2].Bytes()[from[r.lo]:from[r.hi]]):]
			}
		}
	}
	return picked(arr, runs, rows, mem, offsets, values)
}
