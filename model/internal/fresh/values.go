package fresh

import (
	"fmt"
	"math"
)

// A forest holds its leaf values in 16 bits, four columns a word: that is a quarter of what a walk has to load, and sums
// of whole numbers are exact whatever their order. Column c of a leaf is Low[c] + Step[c]·q, q in [0, 65535].
const (
	lanes    = 4
	top      = 1<<16 - 1
	pairs    = 0x0000ffff0000ffff // lanes 0 and 2
	maxTrees = 1 << 16            // sums of more could leave their 32 bits
)

// words is the number of words a leaf has.
func (f *Forest) words() int { return (len(f.Low) + lanes - 1) / lanes }

// set fills column c of all leaves with value(leaf), leaf being a leaf's place, rounded to 1/65535 of the column's range.
func (f *Forest) set(c int, value func(leaf int) float64) {
	leaves := f.Leaves()
	low, high := math.Inf(1), math.Inf(-1)
	for l := range leaves {
		v := value(l)
		low, high = min(low, v), max(high, v)
	}
	f.Low[c], f.Step[c] = low, (high-low)/top
	if high <= low {
		return
	}
	w := f.words()
	for l := range leaves {
		q := uint64(math.Round((value(l) - low) / f.Step[c]))
		f.Values[l*w+c/lanes] |= min(q, top) << (16 * (c % lanes))
	}
}

// add adds a leaf's values to acc, which has two words of two 32-bit sums for each word of values.
func (f *Forest) add(leaf int32, acc []uint64) {
	w := f.words()
	acc = acc[:2*w]
	for i, v := range f.Values[int(leaf)*w : int(leaf+1)*w] {
		acc[2*i] += v & pairs
		acc[2*i+1] += v >> 16 & pairs
	}
}

// total turns the sums of one row into the columns' values. len(dst) = len(f.Low).
func (f *Forest) total(acc []uint64, dst []float64) {
	n := float64(len(f.trees))
	for c := range dst {
		q := acc[c/lanes*2+c%2] >> (16 * (c % lanes &^ 1)) & (1<<32 - 1)
		dst[c] = f.Low[c]*n + f.Step[c]*float64(q)
	}
}

// checkValues looks at what a loaded forest says of its leaves.
func (f *Forest) checkValues() error {
	if len(f.trees) == 0 || len(f.trees) > maxTrees || len(f.Low) == 0 || len(f.Step) != len(f.Low) || len(f.Values) != f.Leaves()*f.words() {
		return fmt.Errorf("%d trees, %d leaves of %d columns, %d words of values", len(f.trees), f.Leaves(), len(f.Low), len(f.Values))
	}
	return nil
}
