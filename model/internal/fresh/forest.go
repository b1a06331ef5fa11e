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

	steps []uint64 // Nodes in the form that walks read
	trees []tree
}

// Node is a split or a leaf. Rows with bin ≤ Cut go left.
type Node struct {
	Feature uint16
	Cut     uint8
	Split   bool
}

// tree says where a tree's root and its first leaf stand, and whether it has at most reach nodes.
type tree struct {
	root, leaf int32
	narrow     bool
}

// A word holds a node: from the top, 32 bits left child, counted from the root, 8 bits 255 − cut, 1 bit leaf, 7 bits leaf
// number, 16 bits feature. Adding a row's bin to the upper 40 bits carries into the child just when the bin is above the
// cut. A leaf is its own child, and no bin carries, so that a walk may pass it again and again; its number, counted in its
// tree, fills the 7 bits and those of the feature.
const (
	leafBit   = 1 << 23
	maxLeaves = 1 << 23 // of a tree
)

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
	f.steps, f.trees = make([]uint64, len(f.Nodes)+reach), nil
	leaves := int32(0)
	for i := 0; i < len(f.Nodes); {
		t := tree{root: int32(i), leaf: leaves}
		next := i + 1
		for ; i < next; i++ {
			if i >= len(f.Nodes) {
				return fmt.Errorf("tree %d lacks nodes", len(f.trees))
			}
			n := f.Nodes[i]
			if n.Split {
				f.steps[i] = uint64(next-int(t.root))<<32 | uint64(255-n.Cut)<<24 | uint64(n.Feature)
				next += 2
				continue
			}
			id := uint64(leaves - t.leaf)
			f.steps[i] = uint64(i-int(t.root))<<32 | leafBit | id
			leaves++
		}
		if leaves-t.leaf > maxLeaves {
			return fmt.Errorf("tree %d has %d leaves", len(f.trees), leaves-t.leaf)
		}
		t.narrow = next-int(t.root) <= reach
		f.trees = append(f.trees, t)
	}
	return nil
}

// reach is how far an index of 16 bits reaches: arrays behind walked rows and trees are that long, so that no index leaves
// them.
const reach = 1 << 16

// sum writes into dst (rows·columns) the sum over the trees of the values of each row's leaves. bins holds rows of d bytes
// and goes on for reach bytes after the last; acc is scratch of two words for each word of a leaf's values, times rows.
func (f *Forest) sum(bins []uint8, d, rows int, acc []uint64, dst []float64) {
	w := 2 * f.words()
	clear(acc[:rows*w])
	if w == 2 {
		f.sumWords(bins, d, rows, acc)
	} else {
		f.sumRows(bins, d, rows, acc)
	}
	n := len(f.Low)
	for r := range rows {
		f.total(acc[r*w:], dst[r*n:(r+1)*n])
	}
}

// sumWords is sum's loop for leaves of one word.
func (f *Forest) sumWords(bins []uint8, d, rows int, acc []uint64) {
	var found [lanesWalked]uint64
	for _, t := range f.trees {
		values := f.Values[t.leaf:]
		r := 0
		for ; t.narrow && r+lanesWalked <= rows; r += lanesWalked {
			f.walkSome(t.root, bins[r*d:], d, &found)
			at := (*[2 * lanesWalked]uint64)(acc[2*r:])
			for l, w := range found {
				v := values[leafOf(w)]
				at[2*l] += v & pairs
				at[2*l+1] += v >> 16 & pairs
			}
		}
		for ; r < rows; r++ {
			f.add(t.leaf+leafOf(f.walk(t.root, bins[r*d:])), acc[2*r:])
		}
	}
}

// sumRows is sum's loop for leaves of any number of words.
func (f *Forest) sumRows(bins []uint8, d, rows int, acc []uint64) {
	w := 2 * f.words()
	var found [lanesWalked]uint64
	for _, t := range f.trees {
		r := 0
		for ; t.narrow && r+lanesWalked <= rows; r += lanesWalked {
			f.walkSome(t.root, bins[r*d:], d, &found)
			for l, at := range found {
				f.add(t.leaf+leafOf(at), acc[(r+l)*w:])
			}
		}
		for ; r < rows; r++ {
			f.add(t.leaf+leafOf(f.walk(t.root, bins[r*d:])), acc[r*w:])
		}
	}
}

// leafOf is the number, in its tree, of the leaf in word w.
func leafOf(w uint64) int32 { return int32(w & (leafBit - 1)) }

// walk is the word of one row's leaf.
func (f *Forest) walk(root int32, bins []uint8) uint64 {
	steps, row := f.steps[root:], (*[reach]uint8)(bins)
	w := steps[0]
	for w&leafBit == 0 {
		w = steps[uint32(child(w, row))]
	}
	return w
}

// lanesWalked is how many rows are walked side by side, so that their loads overlap.
const lanesWalked = 8

// walkSome finds the words of the leaves of lanesWalked rows in a narrow tree, without branches on what they hold.
func (f *Forest) walkSome(root int32, bins []uint8, d int, found *[lanesWalked]uint64) {
	steps := (*[reach]uint64)(f.steps[root:])
	a := steps[0]
	b, c, e, g, h, i, j := a, a, a, a, a, a, a
	for a&b&c&e&g&h&i&j&leafBit == 0 {
		a = steps[uint16((a>>24+uint64(bins[int(uint16(a))]))>>8)]
		b = steps[uint16((b>>24+uint64(bins[d+int(uint16(b))]))>>8)]
		c = steps[uint16((c>>24+uint64(bins[2*d+int(uint16(c))]))>>8)]
		e = steps[uint16((e>>24+uint64(bins[3*d+int(uint16(e))]))>>8)]
		g = steps[uint16((g>>24+uint64(bins[4*d+int(uint16(g))]))>>8)]
		h = steps[uint16((h>>24+uint64(bins[5*d+int(uint16(h))]))>>8)]
		i = steps[uint16((i>>24+uint64(bins[6*d+int(uint16(i))]))>>8)]
		j = steps[uint16((j>>24+uint64(bins[7*d+int(uint16(j))]))>>8)]
	}
	*found = [lanesWalked]uint64{a, b, c, e, g, h, i, j}
}

// child is the node under w that a row goes on to.
func child(w uint64, row *[reach]uint8) uint64 { return (w>>24 + uint64(row[uint16(w)])) >> 8 }
