package fresh

import (
	"fmt"

	"labelweir/model/internal/forest"
)

// Forest is a list of trees whose nodes stand in one table, and one row of values for each leaf.
type Forest struct {
	Nodes  []Node    // tree after tree, each level by level from its root: children stand in the order of their parents
	Width  int       // values a leaf has
	Values []float32 // leaves·Width, in the order of the leaves in Nodes

	words []uint64 // Nodes in the form that walks read
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

// packForest lays the trees of f out; Values are left zero. It returns for each leaf of f its place in Values.
func packForest(f *forest.Forest, width int) (p Forest, place []int) {
	p = Forest{Width: width, Values: make([]float32, f.Leaves()*width)}
	place = make([]int, f.Leaves())
	next := 0
	for t, from := range f.Trees {
		order := []int32{0} // of the tree's nodes, level by level
		for i := 0; i < len(order); i++ {
			n := from.Nodes[order[i]]
			if n.Child < 0 {
				p.Nodes = append(p.Nodes, Node{})
				place[f.First[t]+^n.Child] = next
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

// prepare derives words and trees and tells whether Nodes are whole trees.
func (f *Forest) prepare() error {
	f.words, f.trees = make([]uint64, len(f.Nodes)), nil
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
				f.words[i] = uint64(next)<<32 | uint64(n.Cut)<<16 | uint64(n.Feature)
				next += 2
				continue
			}
			id := uint64(leaves - t.leaf)
			f.words[i] = uint64(i)<<32 | leafBit | id>>16<<24 | 0xff<<16 | id&0xffff
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

// sum writes into acc (rows·Width) the sum over the trees of the values of each row's leaves. bins holds rows of d bytes
// and goes on for reach bytes after the last.
func (f *Forest) sum(bins []uint8, d, rows int, acc []float64) {
	acc = acc[:rows*f.Width]
	clear(acc)
	for _, t := range f.trees {
		r := 0
		for ; r+4 <= rows; r += 4 {
			a, b, c, e := f.walk4(t.root, bins[r*d:], d)
			f.add(t.leaf+leafOf(a), acc[r*f.Width:])
			f.add(t.leaf+leafOf(b), acc[(r+1)*f.Width:])
			f.add(t.leaf+leafOf(c), acc[(r+2)*f.Width:])
			f.add(t.leaf+leafOf(e), acc[(r+3)*f.Width:])
		}
		for ; r < rows; r++ {
			f.add(t.leaf+leafOf(f.walk(t.root, bins[r*d:])), acc[r*f.Width:])
		}
	}
}

// leafOf is the number, in its tree, of the leaf in word w.
func leafOf(w uint64) int32 { return int32(w>>24&0x7f<<16 | w&0xffff) }

// add adds the values of a leaf.
func (f *Forest) add(leaf int32, acc []float64) {
	v := f.Values[int(leaf)*f.Width : int(leaf+1)*f.Width]
	acc = acc[:len(v)]
	for len(v) >= 2 && len(acc) >= 2 {
		acc[0] += float64(v[0])
		acc[1] += float64(v[1])
		v, acc = v[2:], acc[2:]
	}
	if len(v) > 0 && len(acc) > 0 {
		acc[0] += float64(v[0])
	}
}

// walk is the word of one row's leaf.
func (f *Forest) walk(root int32, bins []uint8) uint64 {
	row := (*[reach]uint8)(bins)
	w := f.words[root]
	for w&leafBit == 0 {
		w = f.words[child(w, row)]
	}
	return w
}

// walk4 is the words of the leaves of four rows, walked side by side and without branches, so that their loads overlap.
func (f *Forest) walk4(root int32, bins []uint8, d int) (a, b, c, e uint64) {
	words := f.words
	p, q := (*[reach]uint8)(bins), (*[reach]uint8)(bins[d:])
	r, s := (*[reach]uint8)(bins[2*d:]), (*[reach]uint8)(bins[3*d:])
	a = words[root]
	b, c, e = a, a, a
	for a&b&c&e&leafBit == 0 {
		a = words[child(a, p)]
		b = words[child(b, q)]
		c = words[child(c, r)]
		e = words[child(e, s)]
	}
	return a, b, c, e
}

// child is the node under w that a row goes on to.
func child(w uint64, row *[reach]uint8) uint32 {
	above := (uint32(w>>16)&0xff - uint32(row[uint16(w)])) >> 31
	return uint32(w>>32) + above
}
