package learn

import (
	"math"

	"labelweir/model/internal/forest"
)

// Linear is a one-against-one linear scorer.
type Linear struct {
	Setting
	Pairs []Pair
}

// Pair is the weight vector between two classes, positive for A: the dense block, the constant, then the leaves.
type Pair struct {
	A, B int
	W    []float64
}

// Input is one encoded row as a scorer sees it.
type Input struct {
	Dense  []float32   // numbers, then the constant 1
	Smooth [][]float32 // features of each kernel, then the constant 1
	Leaves []int32     // leaf ids in the cleaned forest
}

// Input is row i of d as the fold sees it.
func (f *Fold) Input(d *Data, i int, in *Input) {
	in.Dense = d.X[i*d.Dense : (i+1)*d.Dense]
	in.Smooth = in.Smooth[:0]
	for j, x := range d.Smooth {
		if x == nil {
			in.Smooth = append(in.Smooth, nil)
			continue
		}
		m := d.Kernels[j].Size() + 1
		in.Smooth = append(in.Smooth, x[i*m:(i+1)*m])
	}
	in.Leaves = nil
	if ids := f.leaves[Cleaned]; ids != nil {
		t := len(f.Forest[Cleaned].Trees)
		in.Leaves = ids[i*t : (i+1)*t]
	}
}

// Vote writes the class scores by which forest which judges row i.
func (f *Fold) Vote(which, i int, dst []float64) {
	t := len(f.Forest[which].Trees)
	VoteScore(f.Forest[which], f.leaves[which][i*t:(i+1)*t], dst)
}

// VoteScore writes the centred logarithms of a forest's vote.
func VoteScore(f *forest.Forest, leaves []int32, dst []float64) {
	f.Vote(leaves, dst)
	logShares(dst, len(f.Trees))
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

// Clip bounds a pair's decision in a class score.
const Clip = 3

// PairScale is the factor of a pair's clipped decision in a class score, for so many pairs of classes.
func PairScale(pairs, classes int) float64 { return 2 / float64(1+2*pairs/classes) }

// Score writes the class scores of l: of each class twice the sum of its clipped pair decisions, over one more than
// the mean number of a class's pairs: 2/k times the sum where all pairs are there. len(dst) = k.
func (l *Linear) Score(in *Input, dst []float64) {
	clear(dst)
	scale := PairScale(len(l.Pairs), len(dst))
	for k := range l.Pairs {
		p := &l.Pairs[k]
		v := l.Decide(in, p) * scale
		dst[p.A] += v
		dst[p.B] -= v
	}
}

// Decide is the clipped decision of one pair of a scorer with this setting, positive for the pair's class A.
func (s Setting) Decide(in *Input, p *Pair) float64 {
	d := &Designs[s.Design]
	x := in.Dense
	if d.Kernel > 0 {
		x = in.Smooth[d.Kernel-1]
	}
	n := len(x)
	w := p.W[:n]
	dot := 0.0
	for j, v := range x[:n-1] {
		dot += float64(v) * w[j]
	}
	v := d.Number*dot + w[n-1]
	if d.Leaf > 0 {
		w, sum := p.W[n:], 0.0
		for _, j := range in.Leaves {
			sum += w[j]
		}
		v += d.Leaf / math.Sqrt(float64(len(in.Leaves))) * sum
	}
	return min(max(v, -Clip), Clip)
}
