package learn

import (
	"math/rand/v2"

	"labelweir/model/internal/forest"
	"labelweir/model/internal/noise"
)

// Fold is one scorer in the making and what its next fit can start from. It belongs to one goroutine at a time.
type Fold struct {
	Number int  // rows of this fold are held out; a number no row has: none is
	Once   bool // no warm fit follows: Voted and Solved free what only that would need

	trees  [Forests][]*forest.Tree
	next   int                     // tree to be regrown first
	Forest [Forests]*forest.Forest // of the last fit
	leaves [Forests][]int32        // N·trees leaf ids of all rows, held out or not
	train  []int32                 // rows trained on
	runs   map[run]*done
}

// TreeCount is the number of trees of each forest for n rows: more where they are cheap.
func TreeCount(n int) int { return min(max(200000/max(n, 1), 100), 200) }

// fewRows is below how many training rows the raw forest takes the time to look for better cuts.
const fewRows = 8000

// regrow is the share of the trees that a warm fit replaces, oldest first.
const regrow = 0.05

// Grow brings the fold's forests up to date with d: all trees anew on a cold fit, some on a warm one. fold gives each
// row's fold.
func (f *Fold) Grow(d *Data, fold []uint8, rng *rand.Rand) {
	f.hold(fold)
	n := TreeCount(d.Rows())
	first, count := 0, n
	if d.Old != nil && len(f.trees[Raw]) > 0 {
		n = len(f.trees[Raw])
		first, count = f.next, max(1, int(regrow*float64(n)))
	} else {
		for i := range f.trees {
			f.trees[i] = make([]*forest.Tree, n)
			f.leaves[i] = nil
		}
	}
	o := forest.Options{MaxDepth: 30, MinLeaf: 1 + len(f.train)/4000, Cuts: 1}
	if len(f.train) < fewRows {
		o.Cuts = 4
	}
	rows := forest.Rows{At: f.train, Key: make([]uint64, len(f.train)), Label: make([]int32, len(f.train))}
	for i, r := range f.train {
		rows.Key[i], rows.Label[i] = d.Keys[r], d.Labels[r]
	}
	f.replace(Raw, first, forest.Grow(d.Bins, rows, d.Classes, count, o, rng))
	f.walk(Raw, d, first, count)
	rows.Chance, o.Cuts = f.clean(d, rows), 1
	f.replace(Cleaned, first, forest.Grow(d.Bins, rows, d.Classes, count, o, rng))
	f.walk(Cleaned, d, first, count)
	f.next = (first + count) % n
}

// Rest takes on other rows with the forests left as they are, for a warm fit in which neither votes nor leaves are read.
func (f *Fold) Rest(fold []uint8) {
	f.hold(fold)
	f.leaves = [Forests][]int32{} // of the rows before
}

// hold sets the rows to train on: all that are not held out.
func (f *Fold) hold(fold []uint8) {
	f.train = f.train[:0]
	for i, k := range fold {
		if int(k) != f.Number {
			f.train = append(f.train, int32(i))
		}
	}
}

// replace puts new trees in the places from first on, round the end.
func (f *Fold) replace(which, first int, trees []*forest.Tree) {
	all := append([]*forest.Tree(nil), f.trees[which]...)
	for i, t := range trees {
		all[(first+i)%len(all)] = t
	}
	f.trees[which] = all
}

// walk brings the leaf ids up to date: those of known rows in old trees are carried over.
func (f *Fold) walk(which int, d *Data, first, count int) {
	was, ids := f.Forest[which], f.leaves[which]
	fo := forest.New(d.Classes, f.trees[which])
	n, t := d.Rows(), len(fo.Trees)
	out := make([]int32, n*t)
	all := make([]int32, n)
	for i := range all {
		all[i] = int32(i)
	}
	if ids == nil || d.Old == nil {
		first, count = 0, t
	} else {
		shift := make([]int32, t)
		for j := range shift {
			shift[j] = fo.First[j] - was.First[j]
		}
		var news []int32
		for i, old := range d.Old {
			if old < 0 {
				news = append(news, int32(i))
				continue
			}
			row := out[i*t : (i+1)*t]
			for j, id := range ids[int(old)*t : int(old+1)*t] {
				row[j] = id + shift[j]
			}
		}
		walkTrees(fo, d.Bins, news, first+count, t-count, out)
	}
	walkTrees(fo, d.Bins, all, first, count, out)
	f.Forest[which], f.leaves[which] = fo, out
}

// walkTrees finds the leaf ids of some rows in count trees from first on, round the end: one tree after the other, so that
// a tree's nodes stay in the cache.
func walkTrees(fo *forest.Forest, b *forest.Bins, rows []int32, first, count int, out []int32) {
	w, t := forest.NewWalker(b, rows), len(fo.Trees)
	for i := range count {
		j := (first + i) % t
		w.Leaves(fo.Trees[j], fo.First[j], out[j:], t)
	}
}

// clean says how probable each class is for each training row, as the out-of-bag votes of the raw forest and a quick
// noise fit see it. Nothing of the fold's held-out rows comes in.
func (f *Fold) clean(d *Data, rows forest.Rows) []float64 {
	k, n := d.Classes, len(rows.At)
	nd := &noise.Data{Classes: k, Observed: rows.Label, Members: [][]float64{make([]float64, n*k)}}
	if d.Source != nil {
		nd.Sources = d.Sources
		nd.Source = make([]int32, n)
		for i, r := range rows.At {
			nd.Source[i] = d.Source[r]
		}
	}
	fo, votes := f.Forest[Raw], nd.Members[0]
	fo.VoteOutOfBag(f.leaves[Raw], rows.At, rows.Key, votes)
	for i := range n {
		logShares(votes[i*k:(i+1)*k], len(fo.Trees))
	}
	layer, _ := noise.Quick(nd)
	chance := make([]float64, n*k)
	layer.Clean(nd, chance)
	return chance
}
