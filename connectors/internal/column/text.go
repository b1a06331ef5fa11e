// Package column collects the values of columns row by row and makes Arrow arrays of them. Its buffers are used again
// for the next record batch, so that a row costs no allocation.
package column

import (
	"math"

	"github.com/apache/arrow/go/v16/arrow"
	"github.com/apache/arrow/go/v16/arrow/array"
	"github.com/apache/arrow/go/v16/arrow/memory"
)

// mostKept is the most bytes of a buffer that are kept for the next array.
const mostKept = 32 << 20

// Text collects text or bytes. All values between two calls of Take must be shorter than 2 GiB together.
type Text struct {
	offsets []int32 // where each value begins in data
	data    []byte
	valid   bits
}

// Append adds a value.
func (t *Text) Append(b []byte) {
	t.offsets = append(t.offsets, int32(len(t.data)))
	t.data = append(t.data, b...)
	t.valid.add(true)
}

// AppendNull adds a value that is not there.
func (t *Text) AppendNull() {
	t.offsets = append(t.offsets, int32(len(t.data)))
	t.valid.add(false)
}

// Begin adds a value that the caller appends to what Begin gives and hands to End.
func (t *Text) Begin() []byte {
	t.offsets = append(t.offsets, int32(len(t.data)))
	t.valid.add(true)
	return t.data
}

// End takes back what Begin gave, with the value behind it.
func (t *Text) End(data []byte) { t.data = data }

// Len is the number of values.
func (t *Text) Len() int { return len(t.offsets) }

// Cut takes off all values from the n-th on.
func (t *Text) Cut(n int) {
	if n < len(t.offsets) {
		t.data = t.data[:t.offsets[n]]
		t.offsets = t.offsets[:n]
		t.valid.cut(n)
	}
}

// Take makes an array of the values and forgets them. The type is utf8, binary or an extension of one of them; the
// caller releases the array.
func (t *Text) Take(dt arrow.DataType, mem memory.Allocator) arrow.Array {
	n := len(t.offsets)
	if len(t.data) > math.MaxInt32 {
		panic("column: values of one array take 2 GiB or more")
	}
	t.offsets = append(t.offsets, int32(len(t.data)))
	nulls := t.valid.nulls
	arr := made(dt, n, nulls, nil, t.valid.buffer(mem), buffer(arrow.Int32Traits.CastToBytes(t.offsets), mem), t.bytes(mem))
	t.offsets = t.offsets[:0]
	t.valid.clear()
	return arr
}

// bytes gives the data away: a copy, so that the buffer can be used again, or the buffer itself when that is too large to
// be kept and mostly full.
func (t *Text) bytes(mem memory.Allocator) *memory.Buffer {
	data := t.data
	if t.data = data[:0]; cap(data) <= mostKept {
		return buffer(data, mem)
	}
	if t.data = nil; len(data) < cap(data)/2 {
		return buffer(data, mem)
	}
	return memory.NewBufferBytes(data)
}

// Vectors collects vectors of one size.
type Vectors struct {
	Size   int
	values []float64
	valid  bits
}

// Append adds a vector, whose length is Size.
func (v *Vectors) Append(x []float64) {
	v.values = append(v.values, x...)
	v.valid.add(true)
}

// AppendNull adds a vector that is not there.
func (v *Vectors) AppendNull() {
	for range v.Size {
		v.values = append(v.values, 0)
	}
	v.valid.add(false)
}

// Len is the number of vectors.
func (v *Vectors) Len() int { return v.valid.n }

// Cut takes off all vectors from the n-th on.
func (v *Vectors) Cut(n int) {
	if n < v.valid.n {
		v.values = v.values[:n*v.Size]
		v.valid.cut(n)
	}
}

// Take makes an array of type fixed_size_list<double> and forgets the vectors; the caller releases the array.
func (v *Vectors) Take(dt *arrow.FixedSizeListType, mem memory.Allocator) arrow.Array {
	flat := buffer(arrow.Float64Traits.CastToBytes(v.values), mem)
	items := array.NewData(dt.Elem(), len(v.values), []*memory.Buffer{nil, flat}, nil, 0, 0)
	flat.Release()
	defer items.Release()
	arr := made(dt, v.valid.n, v.valid.nulls, []arrow.ArrayData{items}, v.valid.buffer(mem))
	v.values = v.values[:0]
	if 8*cap(v.values) > mostKept {
		v.values = nil
	}
	v.valid.clear()
	return arr
}

// made makes an array and gives the buffers away to it.
func made(dt arrow.DataType, n, nulls int, children []arrow.ArrayData, buffers ...*memory.Buffer) arrow.Array {
	data := array.NewData(dt, n, buffers, children, nulls, 0)
	defer data.Release()
	for _, b := range buffers {
		if b != nil {
			b.Release()
		}
	}
	return array.MakeFromData(data)
}

// buffer is a copy of b.
func buffer(b []byte, mem memory.Allocator) *memory.Buffer {
	out := memory.NewResizableBuffer(mem)
	out.Resize(len(b))
	copy(out.Bytes(), b)
	return out
}
