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

// tree says where a tree's root and its first leaf stand.
type tree struct{ root, leaf int32 }

// A word holds a node: from the top, 32 bits index of the left child, 1 bit leaf, 7 bits leaf number, 8 bits cut, 16 bits
// feature. A leaf is its own child, and no bin is above its cut, so that a walk may pass it again and again; its number,
// counted in its tree, fills the other 7 bits and those of the feature.
const (
	leafBit   = 1 << 31
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
	f.steps, f.trees = make([]uint64, len(f.Nodes)), nil
	leaves := int32(0)
	for i := 0; i < len(f.Nodes); {
		t := tree{root: int32(i), leaf: leaves}
		f.trees = append(f.trees, t)
		next := i + 1
		for ; i < next; i++ {
			if i >= len(f.Nodes) {
				return fmt.Errorf("tree %d lacks nodes", len(f.trees)-1)
			}
			n := f.Nodes[i]
			if n.Split {
				f.steps[i] = uint64(next)<<32 | uint64(n.Cut)<<16 | uint64(n.Feature)
				next += 2
				continue
			}
			id := uint64(leaves - t.leaf)
			f.steps[i] = uint64(i)<<32 | leafBit | id>>16<<24 | 0xff<<16 | id&0xffff
			leaves++
		}
		if leaves-t.leaf > maxLeaves {
			return fmt.Errorf("tree %d has %d leaves", len(f.trees)-1, leaves-t.leaf)
		}
	}
	return nil
}

// reach is how far a feature number can reach: the array behind a walked row is that long, so that no index leaves it.
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
	for _, t := range f.trees {
		values := f.Values[t.leaf:]
		r := 0
		for ; r+4 <= rows; r += 4 {
			a, b, c, e := f.walk4(t.root, bins[r*d:], d)
			at := (*[8]uint64)(acc[2*r:])
			v := values[leafOf(a)]
			at[0] += v & pairs
			at[1] += v >> 16 & pairs
			v = values[leafOf(b)]
			at[2] += v & pairs
			at[3] += v >> 16 & pairs
			v = values[leafOf(c)]
			at[4] += v & pairs
			at[5] += v >> 16 & pairs
			v = values[leafOf(e)]
			at[6] += v & pairs
			at[7] += v >> 16 & pairs
		}
		for ; r < rows; r++ {
			f.add(t.leaf+leafOf(f.walk(t.root, bins[r*d:])), acc[2*r:])
		}
	}
}

// sumRows is sum's loop for leaves of any number of words.
func (f *Forest) sumRows(bins []uint8, d, rows int, acc []uint64) {
	w := 2 * f.words()
	for _, t := range f.trees {
		r := 0
		for ; r+4 <= rows; r += 4 {
			a, b, c, e := f.walk4(t.root, bins[r*d:], d)
			at := acc[r*w:]
			f.add(t.leaf+leafOf(a), at)
			f.add(t.leaf+leafOf(b), at[w:])
			f.add(t.leaf+leafOf(c), at[2*w:])
			f.add(t.leaf+leafOf(e), at[3*w:])
		}
		for ; r < rows; r++ {
			f.add(t.leaf+leafOf(f.walk(t.root, bins[r*d:])), acc[r*w:])
		}
	}
}

// leafOf is the number, in its tree, of the leaf in word w.
func leafOf(w uint64) int32 { return int32(w>>24&0x7f<<16 | w&0xffff) }

// walk is the word of one row's leaf.
func (f *Forest) walk(root int32, bins []uint8) uint64 {
	row := (*[reach]uint8)(bins)
	w := f.steps[root]
	for w&leafBit == 0 {
		w = f.steps[child(w, row)]
	}
	return w
}

// walk4 is the words of the leaves of four rows, walked side by side and without branches, so that their loads overlap.
func (f *Forest) walk4(root int32, bins []uint8, d int) (a, b, c, e uint64) {
	steps := f.steps
	p, q := (*[reach]uint8)(bins), (*[reach]uint8)(bins[d:])
	r, s := (*[reach]uint8)(bins[2*d:]), (*[reach]uint8)(bins[3*d:])
	a = steps[root]
	b, c, e = a, a, a
	for a&b&c&e&leafBit == 0 {
		a = steps[child(a, p)]
		b = steps[child(b, q)]
		c = steps[child(c, r)]
		e = steps[child(e, s)]
	}
	return a, b, c, e
}

// child is the node under w that a row goes on to.
func child(w uint64, row *[reach]uint8) uint32 {
	above := (uint32(w>>16)&0xff - uint32(row[uint16(w)])) >> 31
	return uint32(w>>32) + above
}
