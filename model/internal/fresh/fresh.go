// Package fresh judges rows that no model was trained on, fast: it packs the members of a training — votes of forests
// and linear scorers — into contiguous float32 tables, and scores rows block by block so that each table is read once
// a block. Packing rounds weights to float32; what was packed scores the same, bit for bit, before and after it is
// saved.
package fresh

// Machine turns encoded rows into the class scores of every member. It is immutable once packed or checked and may be
// shared by goroutines, each with its own Scratch.
type Machine struct {
	Classes int
	Dense   int // numbers of a dense row, the constant included
	Bins    int // bytes of a binned row
	Forests []Forest
	Kernels []Kernel
	Members []Member
}

// Member is one scorer: the vote of a forest or a linear scorer over pairs of classes.
type Member struct {
	Forest int // index into Machine.Forests, −1: no leaves. A vote has its class shares there, a linear scorer a weight a pair
	At     int // first of its columns of leaf values
	Kernel int // index into Machine.Kernels, −1: none
	Linear bool

	// Of linear scorers only.
	Pairs  []Pair
	Weight []float32 // pairs·(Dense−1), scales included; empty when numbers are not read
	Smooth []float32 // pairs·Kernel.Size(): weights on kernel values
	Clip   float64   // bounds a pair's decision
	Scale  float64   // of a pair's decision in a class score
}

// Pair names two classes and the constant of their decision, which is positive for A.
type Pair struct {
	A, B int
	Bias float64
}

// columns is the number of columns of leaf values that m reads.
func (m *Member) columns(classes int) int {
	if m.Linear {
		return len(m.Pairs)
	}
	return classes
}
