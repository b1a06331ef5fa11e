package forest

import (
	"math"
	"math/rand/v2"
)

// Grown is a forest with what only its growing knows: the leaves of the rows it was grown among.
type Grown struct {
	*Forest
	Leaf  []int32 // len(rows)·Trees: leaf of each listed row in each tree
	InBag []bool  // len(rows)·Trees: whether the tree was grown on that row
}

// Grow grows a forest on the listed rows of b. labels[i] in [0, classes) belongs to rows[i]. When chance is given, every
// tree draws its own labels instead: that of rows[i] is c with chance[i·classes+c]. Splits maximise the class-balanced
// Gini criterion. Cost O(Trees · len(rows) · (Tries + 1) · depth).
func Grow(b *Bins, rows, labels []int32, chance []float64, classes int, o Options, rng *rand.Rand) *Grown {
	if o.Tries == 0 {
		o.Tries = int(math.Ceil(math.Sqrt(float64(b.D))))
	}
	if chance != nil {
		labels = make([]int32, len(rows))
	}
	g := &grower{b: b, rows: rows, labels: labels, chance: chance, o: o, rng: rng,
		f:      &Forest{Classes: classes},
		left:   make([]float64, classes),
		total:  make([]float64, classes),
		counts: make([]int32, classes),
		idx:    make([]int32, 0, len(rows)), spare: make([]int32, len(rows)),
	}
	out := &Grown{Forest: g.f,
		Leaf:  make([]int32, len(rows)*o.Trees),
		InBag: make([]bool, len(rows)*o.Trees),
	}
	for t := range o.Trees {
		g.relabel()
		g.balance()
		g.draw()
		for _, i := range g.idx {
			out.InBag[int(i)*o.Trees+t] = true
		}
		g.f.roots = append(g.f.roots, int32(len(g.f.nodes)))
		g.tree()
	}
	g.f.Leaves = len(g.f.Shares) / classes
	for i, r := range rows {
		g.f.Walk(b.Rows[int(r)*b.D:int(r+1)*b.D], out.Leaf[i*o.Trees:(i+1)*o.Trees])
	}
	return out
}

// OutOfBag writes into dst the vote on listed row i by the trees that were not grown on it.
func (g *Grown) OutOfBag(i int, dst []float64, scratch []int32) {
	trees := g.Trees()
	scratch = scratch[:0]
	for t := range trees {
		if !g.InBag[i*trees+t] {
			scratch = append(scratch, g.Leaf[i*trees+t])
		}
	}
	g.Vote(scratch, dst)
}

type grower struct {
	b            *Bins
	rows, labels []int32
	o            Options
	rng          *rand.Rand
	f            *Forest
	chance       []float64 // len(rows)·classes, or nil
	classWeight  []float64
	left, total  []float64
	counts       []int32
	idx, spare   []int32 // positions in rows of the tree's in-bag rows
	stack        []span
}

// span is a node still to be split: idx[lo:hi].
type span struct {
	lo, hi int32
	node   int32
	depth  int32
}

// balance gives every class the same total weight.
func (g *grower) balance() {
	if g.classWeight == nil {
		g.classWeight = make([]float64, g.f.Classes)
	}
	clear(g.classWeight)
	for _, l := range g.labels {
		g.classWeight[l]++
	}
	for c, n := range g.classWeight {
		if n > 0 {
			g.classWeight[c] = float64(len(g.labels)) / n
		}
	}
}

// relabel draws this tree's labels.
func (g *grower) relabel() {
	if g.chance == nil {
		return
	}
	k := g.f.Classes
	for i := range g.labels {
		u := g.rng.Float64()
		p := g.chance[i*k : i*k+k]
		c := 0
		for c < k-1 && u >= p[c] {
			u -= p[c]
			c++
		}
		g.labels[i] = int32(c)
	}
}

func (g *grower) draw() {
	g.idx = g.idx[:0]
	for i := range g.rows {
		if g.rng.Float64() < g.o.Bag {
			g.idx = append(g.idx, int32(i))
		}
	}
}

func (g *grower) tree() {
	root := int32(len(g.f.nodes))
	g.f.nodes = append(g.f.nodes, node{})
	g.stack = append(g.stack[:0], span{lo: 0, hi: int32(len(g.idx)), node: root})
	for len(g.stack) > 0 {
		s := g.stack[len(g.stack)-1]
		g.stack = g.stack[:len(g.stack)-1]
		feature, cut, ok := g.split(s)
		if !ok {
			g.leaf(s)
			continue
		}
		mid := g.part(s, feature, cut)
		child := int32(len(g.f.nodes))
		g.f.nodes[s.node] = node{child: child, feature: uint16(feature), cut: cut}
		g.f.nodes = append(g.f.nodes, node{}, node{})
		g.stack = append(g.stack,
			span{lo: mid, hi: s.hi, node: child + 1, depth: s.depth + 1},
			span{lo: s.lo, hi: mid, node: child, depth: s.depth + 1})
	}
}

func (g *grower) leaf(s span) {
	k := g.f.Classes
	id := len(g.f.Shares) / k
	g.f.nodes[s.node] = node{child: ^int32(id)}
	clear(g.counts)
	for _, i := range g.idx[s.lo:s.hi] {
		g.counts[g.labels[i]]++
	}
	n := float32(s.hi - s.lo)
	for _, c := range g.counts {
		share := 1 / float32(k)
		if n > 0 {
			share = float32(c) / n
		}
		g.f.Shares = append(g.f.Shares, share)
	}
}

// split looks for the best of Tries random cuts of s.
func (g *grower) split(s span) (feature int, cut uint8, ok bool) {
	in := g.idx[s.lo:s.hi]
	if len(in) < 2*g.o.MinLeaf || len(in) < 2 || int(s.depth) >= g.o.MaxDepth || !g.countTotal(in) {
		return 0, 0, false
	}
	best, valid := 0.0, 0
	for try := 0; valid < g.o.Tries && try < 4*g.o.Tries+8; try++ {
		d := g.rng.IntN(g.b.D)
		col := g.b.Cols[d]
		at := col[g.rows[in[g.rng.IntN(len(in))]]]
		n := g.countLeft(in, col, at)
		if n < g.o.MinLeaf || len(in)-n < g.o.MinLeaf || n == 0 || n == len(in) {
			continue
		}
		valid++
		if v := g.gain(); v > best {
			best, feature, cut, ok = v, d, at, true
		}
	}
	return feature, cut, ok
}

// countTotal counts classes in a node and tells whether there are at least two.
func (g *grower) countTotal(in []int32) bool {
	clear(g.counts)
	for _, i := range in {
		g.counts[g.labels[i]]++
	}
	kinds := 0
	for c, n := range g.counts {
		g.total[c] = float64(n) * g.classWeight[c]
		if n > 0 {
			kinds++
		}
	}
	return kinds > 1
}

// countLeft fills left with the class weights of the rows at or below the cut and returns their number.
func (g *grower) countLeft(in []int32, col []uint8, cut uint8) int {
	counts, rows, labels := g.counts, g.rows, g.labels
	clear(counts)
	for _, i := range in {
		// 1 when col ≤ cut, without a branch.
		counts[labels[i]] += int32(uint32(int32(col[rows[i]])-int32(cut)-1) >> 31)
	}
	n := 0
	for c, m := range counts {
		n += int(m)
		g.left[c] = float64(m) * g.classWeight[c]
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
	in := g.idx[s.lo:s.hi]
	n, m := 0, 0
	for _, i := range in {
		if col[g.rows[i]] <= cut {
			in[n] = i
			n++
		} else {
			g.spare[m] = i
			m++
		}
	}
	copy(in[n:], g.spare[:m])
	return s.lo + int32(n)
}
