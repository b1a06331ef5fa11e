package fresh

import "labelweir/model/internal/forest"

// Forest is a list of trees whose nodes stand in one table, and one row of values for each leaf.
type Forest struct {
	Nodes  []forest.Node // Child counts from the table's start; a leaf's is ^leaf, over all trees
	Roots  []int32       // of each tree
	Width  int           // values a leaf has
	Values []float32     // leaves·Width
}

// packForest lays the trees of f out one after the other, each level by level, so that the top of a tree, which every
// row passes, lies together. Values are left zero.
func packForest(f *forest.Forest, width int) Forest {
	p := Forest{Width: width, Values: make([]float32, f.Leaves()*width)}
	for t, tree := range f.Trees {
		root := int32(len(p.Nodes))
		p.Roots = append(p.Roots, root)
		p.Nodes = append(p.Nodes, tree.Nodes[0])
		// Children still hold their index in the tree when a node comes up; then they move to the end of the table.
		for i := int(root); i < len(p.Nodes); i++ {
			n := &p.Nodes[i]
			if n.Child < 0 {
				n.Child = ^(f.First[t] + ^n.Child)
				n.Feature, n.Cut = 0, 0
				continue
			}
			left, right := tree.Nodes[n.Child], tree.Nodes[n.Child+1]
			n.Child = int32(len(p.Nodes))
			p.Nodes = append(p.Nodes, left, right)
		}
	}
	return p
}

// Leaves is the number of leaves: a tree has one more than it has splits.
func (f *Forest) Leaves() int { return (len(f.Nodes) + len(f.Roots)) / 2 }

// sum writes into acc (rows·Width) the sum over the trees of the values of each row's leaves. bins holds rows of d bytes.
func (f *Forest) sum(bins []uint8, d, rows int, acc []float64) {
	acc = acc[:rows*f.Width]
	clear(acc)
	for _, root := range f.Roots {
		r := 0
		for ; r+4 <= rows; r += 4 {
			a, b, c, e := f.walk4(root, bins[r*d:(r+4)*d], d)
			f.add(a, acc[r*f.Width:])
			f.add(b, acc[(r+1)*f.Width:])
			f.add(c, acc[(r+2)*f.Width:])
			f.add(e, acc[(r+3)*f.Width:])
		}
		for ; r < rows; r++ {
			f.add(f.walk(root, bins[r*d:(r+1)*d]), acc[r*f.Width:])
		}
	}
}

// add adds the values of a leaf.
func (f *Forest) add(leaf int32, acc []float64) {
	v := f.Values[int(leaf)*f.Width : int(leaf+1)*f.Width]
	acc = acc[:len(v)]
	for i, x := range v {
		acc[i] += float64(x)
	}
}

// walk is the leaf of one row.
func (f *Forest) walk(at int32, bins []uint8) int32 {
	n := f.Nodes[at]
	for n.Child >= 0 {
		at = n.Child
		if bins[n.Feature] > n.Cut {
			at++
		}
		n = f.Nodes[at]
	}
	return ^n.Child
}

// walk4 is the leaves of four rows, walked side by side so that their loads overlap.
func (f *Forest) walk4(root int32, bins []uint8, d int) (a, b, c, e int32) {
	return f.walk(root, bins[:d]), f.walk(root, bins[d:2*d]), f.walk(root, bins[2*d:3*d]), f.walk(root, bins[3*d:])
}
