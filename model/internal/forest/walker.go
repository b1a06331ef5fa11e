package forest

// Walker finds the leaves of many rows in one tree after the other. It belongs to one goroutine.
type Walker struct {
	d     int
	at    []int32 // rows of the bins that it walks
	bins  []uint8 // of these rows and, to make whole lanes, some more; then Reach bytes
	steps Steps   // of the tree at hand; Reach words can be read
}

// NewWalker copies the bins of the rows at of b.
func NewWalker(b *Bins, at []int32) *Walker {
	lanes := (len(at) + Lanes - 1) / Lanes * Lanes
	w := &Walker{d: b.D, at: at, bins: make([]uint8, lanes*b.D+Reach), steps: make(Steps, 0, Reach)}
	for i, r := range at {
		copy(w.bins[i*b.D:(i+1)*b.D], b.Row(int(r)))
	}
	return w
}

// Leaves writes into dst[r·stride] the leaf of t that row r of the bins falls into, plus first, for each of its rows.
func (w *Walker) Leaves(t *Tree, first int32, dst []int32, stride int) {
	w.steps = w.steps[:0]
	for i, n := range t.Nodes {
		if n.Child < 0 {
			w.steps = append(w.steps, LeafAt(i, int(^n.Child)))
		} else {
			w.steps = append(w.steps, Split(int(n.Child), n.Feature, n.Cut))
		}
	}
	if len(w.steps) > Reach {
		for i, r := range w.at {
			dst[int(r)*stride] = first + LeafOf(w.steps.Walk(w.bins[i*w.d:]))
		}
		return
	}
	steps := w.steps[:Reach]
	var found [Lanes]uint64
	for i := 0; i < len(w.at); i += Lanes {
		steps.WalkLanes(w.bins[i*w.d:], w.d, &found)
		for l, r := range w.at[i:min(i+Lanes, len(w.at))] {
			dst[int(r)*stride] = first + LeafOf(found[l])
		}
	}
}
