package learn

import "labelweir/model/internal/forest"

// Voted says that the votes on held-out rows have been taken, and whether the fold's trees are wanted further on, to judge
// fresh rows. With Once it frees what linear scorers do not need: all but the cleaned forest's leaf ids and their count.
func (f *Fold) Voted(keepTrees bool) {
	if !f.Once {
		return
	}
	f.leaves[Raw] = nil
	f.trees = [Forests][]*forest.Tree{}
	if keepTrees {
		return
	}
	f.Forest[Raw] = nil
	was := f.Forest[Cleaned]
	f.Forest[Cleaned] = &forest.Forest{Classes: was.Classes, Trees: make([]*forest.Tree, len(was.Trees)), First: was.First}
}

// Solved says that Solve will not be called again. With Once it frees the leaf ids.
func (f *Fold) Solved() {
	if f.Once {
		f.leaves, f.runs = [Forests][]int32{}, nil
	}
}
