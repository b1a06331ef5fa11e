package filter

import (
	"hash/fnv"
	"math"
	"math/bits"

	"labelweir/model"
)

// fingerprint sums an input up, row after row, so that two readings of it can be compared. It does not depend on how
// the rows are cut into batches, and is no protection against a purpose.
type fingerprint struct {
	rows    int64
	sum     uint64
	last    model.Table // its lists of names are the longest
	scratch [1024]uint64
}

// blend stirs v into h: the two halves of a 128-bit product, as in wyhash (Wang Yi 2019).
func blend(h, v uint64) uint64 {
	hi, lo := bits.Mul64(h^0xa0761d6478bd642f, v^0xe7037ed1a0b428db)
	return hi ^ lo
}

// add takes the rows of b in.
func (f *fingerprint) add(b *Batch) {
	n := b.Rows()
	for lo := 0; lo < n; lo += len(f.scratch) {
		hi := min(n, lo+len(f.scratch))
		for _, h := range f.hashes(b, lo, hi) {
			f.sum = blend(f.sum, h)
		}
	}
	f.rows += int64(n)
	f.last = *b.Table
}

// hashes gives one number a row.
func (f *fingerprint) hashes(b *Batch, lo, hi int) []uint64 {
	t, out := b.Table, f.scratch[:hi-lo]
	for i := range out {
		out[i] = blend(t.Keys[lo+i], uint64(t.Labels[lo+i]))
	}
	if t.Sources != nil {
		blendCodes(out, t.Sources[lo:hi])
	}
	if b.Times != nil {
		for i := range out {
			out[i] = blend(out[i], uint64(b.Times[lo+i]))
		}
	}
	for c := range t.Columns {
		col := &t.Columns[c]
		if col.Kind == model.Category {
			blendCodes(out, col.Codes[lo:hi])
			continue
		}
		for i := range out {
			at := (lo + i) * col.Size
			for _, v := range col.Values[at : at+col.Size] {
				out[i] = blend(out[i], math.Float64bits(v))
			}
		}
	}
	return out
}

func blendCodes(out []uint64, codes []int32) {
	for i, c := range codes {
		out[i] = blend(out[i], uint64(c))
	}
}

// total gives the sum of the rows and the names.
func (f *fingerprint) total() uint64 {
	h := fnv.New64a()
	list := func(names []string) {
		for _, s := range names {
			h.Write([]byte(s))
			h.Write([]byte{0xff}) // stands in no UTF-8 text
		}
		h.Write([]byte{0xfe})
	}
	list(f.last.Classes)
	list(f.last.SourceNames)
	for i := range f.last.Columns {
		c := &f.last.Columns[i]
		list([]string{c.Name, c.Kind.String()})
		list(c.Levels)
	}
	return blend(f.sum, h.Sum64())
}
