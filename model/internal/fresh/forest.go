package fresh

import (
	"fmt"

	"labelweir/model/internal/forest"
)

// Forest is a list of trees whose nodes stand in one table, and one row of values for each leaf.
type Forest struct {
	Nodes     []Node    // tree after tree, each level by level from its root: children stand in the order of their parents
	Low, Step []float64 // by column of the leaf values
	Values    []uint64  // in the order of the leaves in Nodes, ⌈columns/4⌉ words each

	steps forest.Steps // of one tree after the other, and Reach more words
	trees []tree
}

// Node is a split or a leaf. Rows with bin ≤ Cut go left.
type Node struct {
	Feature uint16
	Cut     uint8
	Split   bool
}

// tree says where a tree's root and its first leaf stand, and whether it has at most forest.Reach nodes.
type tree struct {
	root, leaf int32
	narrow     bool
}

// packForest lays the trees of f out, with room for so many columns of leaf values. It returns which leaf of f stands at
// each place.
func packForest(f *forest.Forest, columns int) (p Forest, place []int) {
	p = Forest{Low: make([]float64, columns), Step: make([]float64, columns)}
	p.Values = make([]uint64, f.Leaves()*p.words())
	place = make([]int, f.Leaves())
	next := 0
	for t, from := range f.Trees {
		order := []int32{0} // of the tree's nodes, level by level
		for i := 0; i < len(order); i++ {
			n := from.Nodes[order[i]]
			if n.Child < 0 {
				p.Nodes = append(p.Nodes, Node{})
				place[next] = int(f.First[t] + ^n.Child)
				next++
				continue
			}
			p.Nodes = append(p.Nodes, Node{Feature: n.Feature, Cut: n.Cut, Split: true})
			order = append(order, n.Child, n.Child+1)
		}
	}
	if err := p.prepare(); err != nil {
		panic("fresh: " + err.Error()) // a grown forest is in order
	}
	return p, place
}

// Leaves is the number of leaves.
func (f *Forest) Leaves() int {
	n := 0
	for i := range f.Nodes {
		if !f.Nodes[i].Split {
			n++
		}
	}
	return n
}

// prepare derives steps and trees and tells whether Nodes are whole trees.
func (f *Forest) prepare() error {
	f.steps, f.trees = make(forest.Steps, len(f.Nodes)+forest.Reach), nil
	leaves := 0
	for i := 0; i < len(f.Nodes); {
		root, next, leaf := i, i+1, leaves
		for ; i < next; i++ {
			if i >= len(f.Nodes) {
				return fmt.Errorf("tree %d lacks nodes", len(f.trees))
			}
			if n := f.Nodes[i]; n.Split {
				f.steps[i] = forest.Split(next-root, n.Feature, n.Cut)
				next += 2
			} else {
				if leaves-leaf == forest.MaxLeaves {
					return fmt.Errorf("tree %d has more than %d leaves", len(f.trees), forest.MaxLeaves)
				}
				f.steps[i] = forest.LeafAt(i-root, leaves-leaf)
				leaves++
			}
		}
		f.trees = append(f.trees, tree{root: int32(root), leaf: int32(leaf), narrow: next-root <= forest.Reach})
	}
	return nil
}

// sum writes into dst (rows·columns) the sum over the trees of the values of each row's leaves. bins holds rows of d bytes
// and goes on for forest.Reach bytes after the last; acc is scratch of two words for each word of a leaf's values, times rows.
func (f *Forest) sum(bins []uint8, d, rows int, acc []uint64, dst []float64) {
	w := 2 * f.words()
	clear(acc[:rows*w])
	whole := rows - rows%forest.Lanes
	for _, t := range f.trees {
		switch {
		case !t.narrow:
			for r := range rows {
				f.add(t.leaf+forest.LeafOf(f.steps[t.root:].Walk(bins[r*d:])), acc[r*w:])
			}
		case w == 2:
			f.sumWords(t, bins, d, whole, acc)
		default:
			f.sumRows(t, bins, d, whole, acc)
		}
	}
	for r := whole; r < rows; r++ {
		f.sumTrees(bins[r*d:], acc[r*w:])
	}
	n := len(f.Low)
	for r := range rows {
		f.total(acc[r*w:], dst[r*n:(r+1)*n])
	}
}

// sumWords adds tree t for leaves of one word. rows is a multiple of forest.Lanes.
func (f *Forest) sumWords(t tree, bins []uint8, d, rows int, acc []uint64) {
	var found [forest.Lanes]uint64
	steps, values := f.steps[t.root:], f.Values[t.leaf:]
	for r := 0; r < rows; r += forest.Lanes {
		steps.WalkLanes(bins[r*d:], d, &found)
		at := (*[2 * forest.Lanes]uint64)(acc[2*r:])
		for l, w := range found {
			v := values[forest.LeafOf(w)]
			at[2*l] += v & pairs
			at[2*l+1] += v >> 16 & pairs
		}
	}
}

// sumRows adds tree t for leaves of any number of words. rows is a multiple of forest.Lanes.
func (f *Forest) sumRows(t tree, bins []uint8, d, rows int, acc []uint64) {
	w := 2 * f.words()
	var found [forest.Lanes]uint64
	steps := f.steps[t.root:]
	for r := 0; r < rows; r += forest.Lanes {
		steps.WalkLanes(bins[r*d:], d, &found)
		for l, at := range found {
			f.add(t.leaf+forest.LeafOf(at), acc[(r+l)*w:])
		}
	}
}

// sumTrees adds all narrow trees for one row, several trees side by side.
func (f *Forest) sumTrees(bins []uint8, acc []uint64) {
	var roots [forest.Lanes]int32
	var found [forest.Lanes]uint64
	at, n := [forest.Lanes]int32{}, 0
	for i, t := range f.trees {
		if t.narrow {
			roots[n], at[n] = t.root, t.leaf
			n++
		}
		if n == forest.Lanes || n > 0 && i == len(f.trees)-1 {
			f.steps.WalkTrees(&roots, bins, &found)
			for l, w := range found[:n] {
				f.add(at[l]+forest.LeafOf(w), acc)
			}
			n = 0
		}
	}
}
