package table

import (
	"github.com/apache/arrow/go/v16/arrow"
	"github.com/apache/arrow/go/v16/arrow/array"
	"github.com/apache/arrow/go/v16/arrow/bitutil"
	"github.com/apache/arrow/go/v16/arrow/memory"
)

// tagText collects a column of text, a few distinct values mostly. Arrow's own builder takes five times as long.
type tagText struct {
	mem     memory.Allocator
	bytes   *memory.Buffer // of the block being collected
	offsets *memory.Buffer
	valid   *memory.Buffer
	ends    []int32 // over offsets
	rows    int
	used    int // bytes
	nulls   int
}

// reserve begins a block of at most so many rows.
func (t *tagText) reserve(rows int) {
	t.release()
	t.bytes, t.offsets, t.valid = memory.NewResizableBuffer(t.mem), memory.NewResizableBuffer(t.mem), memory.NewResizableBuffer(t.mem)
	t.bytes.Resize(max(16*rows, t.used))
	t.offsets.Resize(4 * (rows + 1))
	t.valid.Resize(int(bitutil.BytesForBits(int64(rows))))
	clear(t.valid.Bytes())
	t.ends = arrow.Int32Traits.CastFromBytes(t.offsets.Bytes())
	t.ends[0], t.rows, t.used, t.nulls = 0, 0, 0, 0
}

// add appends a row.
func (t *tagText) add(s string, valid bool) {
	if valid {
		if len(s) > t.bytes.Len()-t.used {
			t.bytes.Resize(2*t.bytes.Len() + len(s))
		}
		t.used += copy(t.bytes.Bytes()[t.used:], s)
		t.valid.Bytes()[t.rows>>3] |= 1 << (t.rows & 7)
	} else {
		t.nulls++
	}
	t.rows++
	t.ends[t.rows] = int32(t.used)
}

// take gives the column of the block; the caller releases it.
func (t *tagText) take() arrow.Array {
	t.bytes.ResizeNoShrink(t.used)
	t.offsets.ResizeNoShrink(4 * (t.rows + 1))
	t.valid.ResizeNoShrink(int(bitutil.BytesForBits(int64(t.rows))))
	buffers := []*memory.Buffer{t.valid, t.offsets, t.bytes}
	if t.nulls == 0 {
		buffers[0] = nil
	}
	data := array.NewData(arrow.BinaryTypes.String, t.rows, buffers, nil, t.nulls, 0)
	defer data.Release()
	used := t.used
	t.release()
	t.used = used // tells the next block how much it may take
	return array.MakeFromData(data)
}

// release gives the block's memory back.
func (t *tagText) release() {
	if t.bytes != nil {
		t.bytes.Release()
		t.offsets.Release()
		t.valid.Release()
		t.bytes, t.offsets, t.valid, t.ends = nil, nil, nil, nil
	}
}
