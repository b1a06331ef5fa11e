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

// Options say how a forest is grown.
type Options struct {
	Trees    int
	MaxDepth int
	MinLeaf  int     // fewest in-bag rows of a leaf
	Bag      float64 // share of rows each tree is grown on
	Tries    int     // candidate features a node; 0: √D, rounded up
}

// node is one split, or a leaf when child < 0. Rows with bin ≤ cut go to child, the others to child+1.
type node struct {
	child   int32 // ≥ 0: index of the left child; < 0: ^leaf
	feature uint16
	cut     uint8
}

// Forest is a grown forest; it is immutable.
type Forest struct {
	Classes int
	Leaves  int       // of all trees; leaf ids are 0 ≤ id < Leaves
	Shares  []float32 // Leaves·Classes: class shares of the in-bag rows of each leaf
	nodes   []node
	roots   []int32
}

// Trees is the number of trees.
func (f *Forest) Trees() int { return len(f.roots) }

// Walk writes into leaves[t] the leaf of tree t that the row with these bins falls into. len(leaves) = f.Trees().
func (f *Forest) Walk(bins []uint8, leaves []int32) {
	nodes := f.nodes
	for t, root := range f.roots {
		n := nodes[root]
		for n.child >= 0 {
			next := n.child
			if bins[n.feature] > n.cut {
				next++
			}
			n = nodes[next]
		}
		leaves[t] = ^n.child
	}
}

// Vote adds up the class shares of the given leaves, divides by their number and writes the result to dst
// (len Classes). With no leaves every class gets 1/Classes.
func (f *Forest) Vote(leaves []int32, dst []float64) {
	k := f.Classes
	clear(dst)
	if len(leaves) == 0 {
		for c := range dst {
			dst[c] = 1 / float64(k)
		}
		return
	}
	for _, l := range leaves {
		share := f.Shares[int(l)*k : int(l)*k+k]
		for c, s := range share {
			dst[c] += float64(s)
		}
	}
	for c := range dst {
		dst[c] /= float64(len(leaves))
	}
}
