package learn

import (
	"math"

	"labelweir/model/internal/forest"
)

// Scorer holds the forests and linear scorers of one fold. It is immutable once trained.
type Scorer struct {
	Classes int
	Forests [forests]*forest.Forest // nil where nothing uses it
	Linear  []Linear
}

// Linear is a one-against-one linear scorer.
type Linear struct {
	Setting
	Pairs []Pair
}

// Pair is the weight vector between two classes, positive for A.
type Pair struct {
	A, B int
	W    []float64 // dense block at its design's scale, then leaves
}

// clip bounds a pair's decision in a class score.
const clip = 3

// Row is one encoded row with the scratch to score it.
type Row struct {
	Dense  []float32
	Bins   []uint8
	Smooth [][]float32 // features of each kernel
	leaves [forests][]int32
}

// NewRow returns scratch for rows with so many dense values and bins.
func (s *Scorer) NewRow(dense, bins int) *Row {
	r := &Row{Dense: make([]float32, dense), Bins: make([]uint8, bins), Smooth: make([][]float32, len(KernelGammas))}
	for i, f := range s.Forests {
		if f != nil {
			r.leaves[i] = make([]int32, f.Trees())
		}
	}
	return r
}

// Walk finds the row's leaves in every forest. It comes before Vote and Decide.
func (s *Scorer) Walk(r *Row) {
	for i, f := range s.Forests {
		if f != nil {
			f.Walk(r.Bins, r.leaves[i])
		}
	}
}

// Vote writes the class scores of forest i: centred logarithms of its vote.
func (s *Scorer) Vote(i int, r *Row, dst []float64) {
	s.Forests[i].Vote(r.leaves[i], dst)
	logShares(dst, s.Forests[i].Trees())
}

// logShares turns shares into centred logarithms, floored at half a tree's vote.
func logShares(v []float64, trees int) {
	mean := 0.0
	floor := 1 / (2 * float64(max(trees, 1)))
	for c, s := range v {
		v[c] = math.Log(max(s, floor))
		mean += v[c]
	}
	mean /= float64(len(v))
	for c := range v {
		v[c] -= mean
	}
}

// Decide writes the class scores of linear scorer i: 2/k times the sum of its clipped pair decisions.
func (s *Scorer) Decide(i int, r *Row, dst []float64) {
	l := &s.Linear[i]
	d := &designs[l.Design]
	clear(dst)
	var leaves []int32
	if d.Leaf > 0 {
		leaves = r.leaves[d.Forest]
	}
	number, leaf := d.Number, 0.0
	if len(leaves) > 0 {
		leaf = d.Leaf / math.Sqrt(float64(len(leaves)))
	}
	x := r.Dense
	if d.Kernel > 0 {
		x = r.Smooth[d.Kernel-1]
	}
	n := len(x)
	scale := 2 / float64(s.Classes)
	for k := range l.Pairs {
		p := &l.Pairs[k]
		if p.W == nil {
			continue
		}
		w := p.W[:n]
		dot := 0.0
		for j, x := range x[:n-1] {
			dot += float64(x) * w[j]
		}
		v := number*dot + w[n-1]
		w = p.W[n:]
		sum := 0.0
		for _, j := range leaves {
			sum += w[j]
		}
		v += leaf * sum
		v = min(max(v, -clip), clip) * scale
		dst[p.A] += v
		dst[p.B] -= v
	}
}
