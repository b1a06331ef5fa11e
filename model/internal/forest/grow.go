package forest

import (
	"math"
	"math/rand/v2"
)

// Rows says which rows of Bins a tree may be grown on, with their labels.
type Rows struct {
	At     []int32   // rows of Bins
	Key    []uint64  // key of each, see Tree.InBag
	Label  []int32   // class of each
	Chance []float64 // len(At)·classes, or nil. When given, every tree draws its own labels: c with Chance[i·classes+c]
}

// Options say how trees are grown.
type Options struct {
	MaxDepth int
	MinLeaf  int // fewest in-bag rows of a leaf
	Cuts     int // random cuts tried of each candidate feature, at least 1
}

// Grow grows n trees. Each is grown on a random 63 % of the rows; of √D random features, each with Cuts random cuts,
// a node takes the one with the best class-balanced Gini criterion. Cost O(n · len(rows) · √D · depth).
func Grow(b *Bins, rows Rows, classes, n int, o Options, rng *rand.Rand) []*Tree {
	g := &grower{b: b, rows: rows, labels: rows.Label, o: o, rng: rng, k: classes,
		tries:  int(math.Ceil(math.Sqrt(float64(b.D)))),
		left:   make([]float64, classes),
		total:  make([]float64, classes),
		weight: make([]float64, classes),
		counts: make([]int32, classes),
		node:   make([]int32, classes),
		below:  make([]int32, classes),
		in:     make([]drawn, 0, len(rows.At)),
		spare:  make([]drawn, len(rows.At)),
	}
	if rows.Chance != nil {
		g.labels = make([]int32, len(rows.At))
	}
	trees := make([]*Tree, n)
	for i := range trees {
		trees[i] = g.tree()
	}
	return trees
}

type grower struct {
	b                   *Bins
	rows                Rows
	labels              []int32 // of rows, as the tree sees them
	o                   Options
	rng                 *rand.Rand
	k, tries            int
	weight, left, total []float64 // by class
	counts              []int32
	in, spare           []drawn // the tree's in-bag rows
	stack               []span
	tally               []int32 // rows of each class of each span of the stack
	node, below         []int32 // of the node at hand, and at or below the best cut
	t                   *Tree
}

// drawn is one in-bag row: where it stands in the bins, and its label. Both lie together so that a split reads them in one
// sweep.
type drawn struct{ row, label int32 }

// span is a node still to be split: in[lo:hi].
type span struct{ lo, hi, node, depth int32 }

func (g *grower) tree() *Tree {
	g.t = &Tree{Nodes: make([]Node, 1), Seed: g.rng.Uint64()}
	g.relabel()
	g.balance()
	g.in = g.in[:0]
	for i, k := range g.rows.Key {
		if g.t.InBag(k) {
			g.in = append(g.in, drawn{g.rows.At[i], g.labels[i]})
		}
	}
	clear(g.node)
	for _, r := range g.in {
		g.node[r.label]++
	}
	g.stack = append(g.stack[:0], span{hi: int32(len(g.in))})
	g.tally = append(g.tally[:0], g.node...)
	for len(g.stack) > 0 {
		s := g.pop()
		feature, cut, ok := g.split(s)
		if !ok {
			g.leaf(s)
			continue
		}
		mid := g.part(s, feature, cut)
		child := int32(len(g.t.Nodes))
		g.t.Nodes[s.node] = Node{Child: child, Feature: uint16(feature), Cut: cut}
		g.t.Nodes = append(g.t.Nodes, Node{}, Node{})
		g.stack = append(g.stack,
			span{lo: mid, hi: s.hi, node: child + 1, depth: s.depth + 1},
			span{lo: s.lo, hi: mid, node: child, depth: s.depth + 1})
		for c, n := range g.node {
			g.tally = append(g.tally, n-g.below[c])
		}
		g.tally = append(g.tally, g.below...)
	}
	return g.t
}

// pop takes a span off the stack and makes it the node at hand.
func (g *grower) pop() span {
	top := len(g.stack) - 1
	s := g.stack[top]
	copy(g.node, g.tally[top*g.k:])
	g.stack, g.tally = g.stack[:top], g.tally[:top*g.k]
	return s
}

func (g *grower) leaf(s span) {
	id := len(g.t.Shares) / g.k
	g.t.Nodes[s.node] = Node{Child: ^int32(id)}
	n := float32(s.hi - s.lo)
	for _, c := range g.node {
		share := 1 / float32(g.k)
		if n > 0 {
			share = float32(c) / n
		}
		g.t.Shares = append(g.t.Shares, share)
	}
}

// split looks for the best of some random cuts of s; features that do not vary in it are drawn again, within limits.
func (g *grower) split(s span) (feature int, cut uint8, ok bool) {
	in := g.in[s.lo:s.hi]
	if len(in) < 2*g.o.MinLeaf || len(in) < 2 || int(s.depth) >= g.o.MaxDepth || !g.mixed() {
		return 0, 0, false
	}
	best, valid := 0.0, 0
	for try := 0; valid < g.tries && try < 4*g.tries+8; try++ {
		d := g.rng.IntN(g.b.D)
		col := g.b.Cols[d]
		varies := false
		for range g.o.Cuts {
			at := col[in[g.rng.IntN(len(in))].row]
			n := g.countLeft(in, col, at)
			if n < g.o.MinLeaf || len(in)-n < g.o.MinLeaf || n == 0 || n == len(in) {
				continue
			}
			varies = true
			if v := g.gain(); v > best {
				best, feature, cut, ok = v, d, at, true
				copy(g.below, g.counts)
			}
		}
		if varies {
			valid++
		}
	}
	return feature, cut, ok
}

// mixed fills total and tells whether the node has rows of at least two classes.
func (g *grower) mixed() bool {
	kinds := 0
	for c, n := range g.node {
		g.total[c] = float64(n) * g.weight[c]
		if n > 0 {
			kinds++
		}
	}
	return kinds > 1
}

// countLeft fills left with the class weights of the rows at or below the cut and returns their number.
func (g *grower) countLeft(in []drawn, col []uint8, cut uint8) int {
	counts := g.counts
	if g.k == 2 {
		all, ones := int32(0), int32(0)
		for _, r := range in {
			below := int32(uint32(int32(col[r.row])-int32(cut)-1) >> 31) // 1 when col ≤ cut, without a branch
			all += below
			ones += below & r.label
		}
		counts[0], counts[1] = all-ones, ones
	} else {
		clear(counts)
		for _, r := range in {
			counts[r.label] += int32(uint32(int32(col[r.row])-int32(cut)-1) >> 31)
		}
	}
	n := 0
	for c, m := range counts {
		n += int(m)
		g.left[c] = float64(m) * g.weight[c]
	}
	return n
}

// gain is Σ L_c²/L + Σ R_c²/R, which is largest where the weighted Gini impurity is smallest.
func (g *grower) gain() float64 {
	var l, r, l2, r2 float64
	for c, a := range g.left {
		b := g.total[c] - a
		l += a
		r += b
		l2 += a * a
		r2 += b * b
	}
	return l2/l + r2/r
}

// part moves the rows at or below the cut to the front of s, both sides in their old order.
func (g *grower) part(s span, feature int, cut uint8) int32 {
	col := g.b.Cols[feature]
	in := g.in[s.lo:s.hi]
	spare := g.spare[:len(in)]
	n, m := 0, 0
	for _, r := range in {
		// Written to both sides, kept on one: no branch.
		in[n], spare[m] = r, r
		below := int(uint32(int32(col[r.row])-int32(cut)-1) >> 31)
		n += below
		m += 1 - below
	}
	copy(in[n:], spare[:m])
	return s.lo + int32(n)
}
