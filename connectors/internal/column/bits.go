package column

import "github.com/apache/arrow/go/v16/arrow/memory"

// bits says of each value whether it is there.
type bits struct {
	bytes    []byte
	n, nulls int
}

func (v *bits) add(there bool) {
	if v.n&7 == 0 {
		v.bytes = append(v.bytes, 0)
	}
	if there {
		v.bytes[v.n>>3] |= 1 << (v.n & 7)
	} else {
		v.nulls++
	}
	v.n++
}

// cut takes off all from the n-th on.
func (v *bits) cut(n int) {
	for v.n > n {
		v.n--
		if v.bytes[v.n>>3]&(1<<(v.n&7)) == 0 {
			v.nulls--
		}
		v.bytes[v.n>>3] &^= 1 << (v.n & 7)
	}
	v.bytes = v.bytes[:(n+7)/8]
}

// buffer is the bitmap, nil when all are there.
func (v *bits) buffer(mem memory.Allocator) *memory.Buffer {
	if v.nulls == 0 {
		return nil
	}
	return buffer(v.bytes, mem)
}

func (v *bits) clear() { v.bytes, v.n, v.nulls = v.bytes[:0], 0, 0 }
