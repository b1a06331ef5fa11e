// Package forest grows extremely randomised trees (Geurts, Ernst & Wehenkel 2006) on binned features. A forest serves
// twice: the leaves a row falls into are features for a linear scorer, and the class shares in those leaves are a vote.
package forest

// Bins holds the features of n rows as small whole numbers, once column by column for growing and once row by row for
// walking. Both are read only.
type Bins struct {
	N, D int
	Cols [][]uint8 // D columns of N
	Rows []uint8   // N·D, row after row
}

// Row is the bins of row i.
func (b *Bins) Row(i int) []uint8 { return b.Rows[i*b.D : (i+1)*b.D] }

// Node is one split, or a leaf when Child < 0. Rows with bin ≤ Cut go to Child, the others to Child+1.
type Node struct {
	Child   int32 // ≥ 0: index of the left child; < 0: ^leaf
	Feature uint16
	Cut     uint8
}

// Tree is one grown tree; it is immutable.
type Tree struct {
	Nodes  []Node
	Shares []float32 // leaves·classes: class shares of the in-bag rows of each leaf
	Seed   uint64    // decides which rows were in its bag, see InBag
}

// Leaf is the leaf that a row with these bins falls into.
func (t *Tree) Leaf(bins []uint8) int32 {
	n := t.Nodes[0]
	for n.Child >= 0 {
		next := n.Child
		if bins[n.Feature] > n.Cut {
			next++
		}
		n = t.Nodes[next]
	}
	return ^n.Child
}

// Forest is a list of trees over the same classes and bins. Leaf ids of the forest are those of its trees one after
// the other: tree t's leaf l has the id First[t] + l.
type Forest struct {
	Classes int
	Trees   []*Tree
	First   []int32 // one more than there are trees; the last is the number of leaves
}

// New puts trees together.
func New(classes int, trees []*Tree) *Forest {
	f := &Forest{Classes: classes, Trees: trees, First: make([]int32, len(trees)+1)}
	for t, tree := range trees {
		f.First[t+1] = f.First[t] + int32(len(tree.Shares)/classes)
	}
	return f
}

// Leaves is the number of leaves of all trees.
func (f *Forest) Leaves() int { return int(f.First[len(f.Trees)]) }

// Walk writes into leaves[t] the leaf id in tree t of a row with these bins. len(leaves) = len(f.Trees).
func (f *Forest) Walk(bins []uint8, leaves []int32) {
	for t, tree := range f.Trees {
		leaves[t] = f.First[t] + tree.Leaf(bins)
	}
}

// Vote writes to dst (len Classes) the mean class shares of the row's leaf ids over all trees.
func (f *Forest) Vote(leaves []int32, dst []float64) {
	clear(dst)
	for t, id := range leaves {
		l := int(id - f.First[t])
		share := f.Trees[t].Shares[l*f.Classes : (l+1)*f.Classes]
		for c, s := range share {
			dst[c] += float64(s)
		}
	}
	for c := range dst {
		dst[c] /= float64(len(leaves))
	}
}
