package forest

import "fmt"

// Steps are the nodes of a tree in the form that walks read, one word a node, the root first. A word holds, from the top,
// 32 bits left child, 8 bits 255 − cut, 1 bit leaf, 7 bits leaf number, 16 bits feature. Adding a row's bin to the upper
// 40 bits carries into the child just when the bin is above the cut. A leaf is its own child, and no bin carries, so that a
// walk may pass it again and again; its number fills the 7 bits and those of the feature.
type Steps []uint64

const (
	leafBit = 1 << 23

	// MaxLeaves is the most leaves of a tree.
	MaxLeaves = leafBit

	// Reach is how far an index of 16 bits reaches. Arrays behind rows and trees that are walked side by side are that
	// long, so that no index leaves them.
	Reach = 1 << 16

	// Lanes is how many rows WalkLanes walks.
	Lanes = 8
)

// Split is the word of a split.
func Split(child int, feature uint16, cut uint8) uint64 {
	return uint64(child)<<32 | uint64(255-cut)<<24 | uint64(feature)
}

// LeafAt is the word of leaf number leaf, which stands at this place among the tree's nodes.
func LeafAt(place, leaf int) uint64 {
	if leaf >= MaxLeaves {
		panic(fmt.Sprintf("forest: leaf %d of a tree", leaf))
	}
	return uint64(place)<<32 | leafBit | uint64(leaf)
}

// LeafOf is the number of the leaf whose word a walk has found.
func LeafOf(word uint64) int32 { return int32(word & (leafBit - 1)) }

// Walk finds the word of the leaf of the row whose bins begin bins.
func (s Steps) Walk(bins []uint8) uint64 {
	w := s[0]
	for w&leafBit == 0 {
		w = s[uint32((w>>24+uint64(bins[uint16(w)]))>>8)]
	}
	return w
}

// WalkLanes finds the words of the leaves of Lanes rows of d bins each, side by side and without branches on what they
// hold, so that their loads overlap. The tree has at most Reach nodes; Reach words and, from the last row on, Reach + d
// bins are there to be read.
func (s Steps) WalkLanes(bins []uint8, d int, found *[Lanes]uint64) {
	steps := (*[Reach]uint64)(s)
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
	*found = [Lanes]uint64{a, b, c, e, g, h, i, j}
}

// WalkTrees finds the words of the leaves of one row in Lanes trees of at most Reach nodes, which begin at these places of
// s. From the row on, Reach bins are there to be read.
func (s Steps) WalkTrees(roots *[Lanes]int32, bins []uint8, found *[Lanes]uint64) {
	row := (*[Reach]uint8)(bins)
	for l, r := range roots {
		found[l] = s[r]
	}
	for all := uint64(0); all&leafBit == 0; {
		all = leafBit
		for l, w := range found {
			w = s[int(roots[l])+int(uint16((w>>24+uint64(row[uint16(w)]))>>8))]
			found[l] = w
			all &= w
		}
	}
}
