package table

import (
	"github.com/apache/arrow/go/v16/arrow"
	"github.com/apache/arrow/go/v16/arrow/array"
	"github.com/apache/arrow/go/v16/arrow/memory"
)

// concatenateUnions joins unions, which arrow/go v16 does not.
func concatenateUnions(arrs []arrow.Array, mem memory.Allocator) (arrow.Array, error) {
	dt := arrs[0].DataType().(arrow.UnionType)
	rows := 0
	for _, a := range arrs {
		rows += a.Len()
	}
	codes := memory.NewResizableBuffer(mem)
	defer codes.Release()
	codes.Reserve(rows)
	for _, a := range arrs {
		d := a.Data()
		if d.Len() > 0 {
			codes = appendBytes(codes, d.Buffers()[1].Bytes()[d.Offset():d.Offset()+d.Len()])
		}
	}
	buffers := []*memory.Buffer{nil, codes}
	children := make([][]arrow.Array, dt.NumFields())
	defer func() {
		for _, list := range children {
			for _, c := range list {
				c.Release()
			}
		}
	}()
	if dt.Mode() == arrow.DenseMode {
		offsets := memory.NewResizableBuffer(mem)
		defer offsets.Release()
		offsets.Resize(arrow.Int32Traits.BytesRequired(rows))
		denseChildren(dt, arrs, children, arrow.Int32Traits.CastFromBytes(offsets.Bytes()))
		buffers = append(buffers, offsets)
	} else {
		for k := range children {
			for _, a := range arrs {
				d := a.Data()
				children[k] = append(children[k], slicedData(d.Children()[k], d.Offset(), d.Offset()+d.Len()))
			}
		}
	}
	return joinedUnion(dt, rows, buffers, children, mem)
}

// joinedUnion makes the union of what was gathered.
func joinedUnion(dt arrow.UnionType, rows int, buffers []*memory.Buffer, children [][]arrow.Array, mem memory.Allocator) (arrow.Array, error) {
	joined := make([]arrow.ArrayData, len(children))
	for k := range children {
		all, err := concatenate(children[k], mem)
		if err != nil {
			return nil, err
		}
		defer all.Release()
		joined[k] = all.Data()
	}
	data := array.NewData(dt, rows, buffers, joined, 0, 0)
	defer data.Release()
	return array.MakeFromData(data), nil
}

// denseChildren lists for each child of dense unions the slices that the rows use, in their order, and sets the rows'
// new offsets into the joined slices.
func denseChildren(dt arrow.UnionType, arrs []arrow.Array, children [][]arrow.Array, offsets []int32) {
	next := make([]int32, len(children))
	row := 0
	for _, a := range arrs {
		d := a.Data()
		spans := make([]run, len(children)) // the slice being made longer
		flush := func(k int) {
			if s := spans[k]; s.hi > s.lo {
				children[k] = append(children[k], slicedData(d.Children()[k], int(s.lo), int(s.hi)))
			}
		}
		for i := range d.Len() {
			code := int8(d.Buffers()[1].Bytes()[d.Offset()+i])
			k := dt.ChildIDs()[code]
			at := int64(arrow.Int32Traits.CastFromBytes(d.Buffers()[2].Bytes())[d.Offset()+i])
			if at != spans[k].hi || spans[k].hi == spans[k].lo {
				flush(k)
				spans[k] = run{at, at}
			}
			spans[k].hi++
			offsets[row] = next[k]
			next[k]++
			row++
		}
		for k := range spans {
			flush(k)
		}
	}
	for k := range children {
		if len(children[k]) == 0 { // a child needs its type at least
			children[k] = append(children[k], slicedData(arrs[0].Data().Children()[k], 0, 0))
		}
	}
}

// slicedData is values lo ≤ i < hi of d.
func slicedData(d arrow.ArrayData, lo, hi int) arrow.Array {
	s := array.NewSliceData(d, int64(lo), int64(hi))
	defer s.Release()
	return array.MakeFromData(s)
}

func appendBytes(b *memory.Buffer, more []byte) *memory.Buffer {
	n := b.Len()
	b.Resize(n + len(more))
	copy(b.Bytes()[n:], more)
	return b
}

// concatenateRuns joins run-end-encoded arrays; arrow/go v16 gets the ends of a sliced first one wrong.
func concatenateRuns(arrs []arrow.Array, mem memory.Allocator) (arrow.Array, error) {
	dt := arrs[0].DataType().(*arrow.RunEndEncodedType)
	ends := array.NewBuilder(mem, dt.RunEnds())
	defer ends.Release()
	values := make([]arrow.Array, len(arrs))
	rows := 0
	for i, a := range arrs {
		r := a.(*array.RunEndEncoded)
		values[i] = r.LogicalValuesArray()
		defer values[i].Release()
		own := r.LogicalRunEndsArray(mem)
		list, err := appendNumbers(nil, own)
		own.Release()
		if err != nil {
			return nil, err
		}
		for _, e := range list {
			end := rows + min(int(e), r.Len()) // a block has fewer rows than an int16 counts
			switch b := ends.(type) {
			case *array.Int16Builder:
				b.Append(int16(end))
			case *array.Int32Builder:
				b.Append(int32(end))
			case *array.Int64Builder:
				b.Append(int64(end))
			}
		}
		rows += r.Len()
	}
	all, err := concatenate(values, mem)
	if err != nil {
		return nil, err
	}
	defer all.Release()
	endArr := ends.NewArray()
	defer endArr.Release()
	return array.NewRunEndEncodedArray(endArr, all, rows, 0), nil
}
