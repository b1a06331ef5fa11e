package learn

import (
	"math"
	"math/rand/v2"
	"reflect"
	"slices"
	"testing"

	"labelweir/model/internal/chain"
)

// heldOut trains fold 0 and gives the class scores, by every kind of member, of the rows it holds out. Slid data, if
// given, follow warm.
func heldOut(all []*Data, folds int) [][]float64 {
	f := &Fold{Number: 0}
	var out [][]float64
	for step, d := range all {
		fold := dealt(d, folds)
		var s chain.Scratch
		rng := rand.New(rand.NewPCG(5, uint64(step)))
		o := chain.PortfolioOptions{}
		if step > 0 {
			o = chain.PortfolioOptions{WarmEpochs: 5, Hysteresis: 1e-3}
		}
		f.Grow(d, fold, rng)
		out = nil
		for which := range Forests {
			out = append(out, f.scores(d, fold, func(i int, dst []float64) { f.Vote(which, i, dst) }))
		}
		for design := range Designs {
			linear := Linear{Setting: Setting{Design: design}}
			f.Solve(d, design, Designs[design].Lambdas[1], []float64{-0.5}, o, rng, &s, func(_ int, p Pair) {
				linear.Pairs = append(linear.Pairs, p)
			})
			var in Input
			out = append(out, f.scores(d, fold, func(i int, dst []float64) {
				f.Input(d, i, &in)
				linear.Score(&in, dst)
			}))
		}
	}
	return out
}

func (f *Fold) scores(d *Data, fold []uint8, score func(i int, dst []float64)) []float64 {
	out := make([]float64, d.Rows()*d.Classes)
	for i, at := range fold {
		if int(at) == f.Number {
			score(i, out[i*d.Classes:(i+1)*d.Classes])
		}
	}
	return out
}

// slide drops the first by rows of d and numbers the others as rows of a fit before.
func slide(d *Data, by int) *Data {
	n := d.Rows() - by
	s := &Data{Classes: d.Classes, Dense: d.Dense, Kernels: d.Kernels, Pairs: d.Pairs, Sources: d.Sources,
		Keys: d.Keys[by:], X: d.X[by*d.Dense:], Labels: slices.Clone(d.Labels[by:])}
	if d.Source != nil {
		s.Source = d.Source[by:]
	}
	bins := *d.Bins
	bins.N, bins.Rows, bins.Cols = n, d.Bins.Rows[by*bins.D:], nil
	for _, c := range d.Bins.Cols {
		bins.Cols = append(bins.Cols, c[by:])
	}
	s.Bins = &bins
	for j, x := range d.Smooth {
		s.Smooth = append(s.Smooth, x[by*(d.Kernels[j].Size()+1):])
	}
	for i := range n {
		s.Old = append(s.Old, int32(i+by))
	}
	return s
}

// What is said of a row never depends on its own label, nor on those of the rows held out with it: other labels there,
// the same scores, bit for bit.
func TestHeldOutScoresDoNotSeeHeldOutLabels(t *testing.T) {
	const folds = 4
	for name, sources := range map[string]int{"plain": 0, "with sources": 3} {
		for _, warm := range []bool{false, true} {
			d := made(160, 4, 3, sources, 1)
			other := *d
			other.Labels = slices.Clone(d.Labels)
			rng := rand.New(rand.NewPCG(8, 8))
			changed := 0
			for i, at := range dealt(d, folds) {
				if at == 0 {
					other.Labels[i] = int32(rng.IntN(3))
					if other.Labels[i] != d.Labels[i] {
						changed++
					}
				}
			}
			if changed < 10 {
				t.Fatalf("%d labels changed", changed)
			}
			a, b := []*Data{d}, []*Data{&other}
			if warm {
				a, b = append(a, slide(d, 8)), append(b, slide(&other, 8))
			}
			if !reflect.DeepEqual(heldOut(a, folds), heldOut(b, folds)) {
				t.Errorf("%s, warm %v: scores of held-out rows follow their labels", name, warm)
			}
			// The check can fail: labels of the other rows do matter.
			c := *d
			c.Labels = slices.Clone(d.Labels)
			for i, at := range dealt(d, folds) {
				if at != 0 {
					c.Labels[i] = (c.Labels[i] + 1) % 3
					break
				}
			}
			if reflect.DeepEqual(heldOut([]*Data{d}, folds), heldOut([]*Data{&c}, folds)) {
				t.Error("a label of a row trained on does not matter")
			}
		}
	}
}

// Every kind of member ranks the class a row was drawn from first, mostly, though it never saw the row.
func TestEveryMemberLearns(t *testing.T) {
	d := made(400, 5, 3, 0, 2)
	fold := dealt(d, 4)
	for m, s := range heldOut([]*Data{d, slide(d, 0)}, 4) {
		right, n := 0.0, 0.0
		for i, at := range fold {
			if at != 0 {
				continue
			}
			n++
			v := s[3*i : 3*i+3]
			if slices.Index(v, slices.Max(v)) == int(d.Labels[i]) {
				right++
			}
			if math.Abs(v[0]+v[1]+v[2]) > 1e-6 {
				t.Fatalf("member %d, row %d: scores %v are not centred", m, i, v)
			}
		}
		if right/n < 0.75 {
			t.Errorf("member %d: %.2f right", m, right/n)
		}
	}
}

func TestSameSeedSameScores(t *testing.T) {
	d := made(120, 3, 2, 0, 3)
	all := []*Data{d, slide(d, 6)}
	if !reflect.DeepEqual(heldOut(all, 3), heldOut(all, 3)) {
		t.Error("two trainings differ")
	}
}

// A warm fit regrows a share of the trees and keeps the others, and what it remembers of old rows is what a walk gives.
func TestWarmGrowthKeepsMostTrees(t *testing.T) {
	d := made(200, 4, 2, 0, 4)
	fold := dealt(d, 3)
	f := &Fold{Number: 1}
	rng := rand.New(rand.NewPCG(1, 1))
	f.Grow(d, fold, rng)
	was := slices.Clone(f.Forest[Raw].Trees)
	s := slide(d, 10)
	f.Grow(s, fold[10:], rng)
	kept := 0
	for i, tree := range f.Forest[Raw].Trees {
		if tree == was[i] {
			kept++
		}
	}
	if n := len(was); kept == n || kept < n/2 {
		t.Errorf("%d of %d trees kept", kept, n)
	}
	for which := range Forests {
		fo := f.Forest[which]
		n := len(fo.Trees)
		walked := make([]int32, n)
		for i := range s.Rows() {
			fo.Walk(s.Bins.Row(i), walked)
			if !slices.Equal(walked, f.leaves[which][i*n:(i+1)*n]) {
				t.Fatalf("forest %d, row %d: leaves %v, walked %v", which, i, f.leaves[which][i*n:(i+1)*n], walked)
			}
		}
	}
}

func TestForgetKeepsOnlyTheListedSettings(t *testing.T) {
	d := made(80, 3, 2, 0, 5)
	f := &Fold{Number: 0}
	rng := rand.New(rand.NewPCG(1, 1))
	var s chain.Scratch
	f.Grow(d, dealt(d, 3), rng)
	for _, lambda := range []float64{1e-3, 1e-2} {
		f.Solve(d, 0, lambda, Qs[:], chain.PortfolioOptions{}, rng, &s, func(int, Pair) {})
	}
	f.Forget([]Setting{{Design: 0, Lambda: 1e-2, Q: 0}})
	if len(f.runs) != 1 {
		t.Fatalf("%d runs left", len(f.runs))
	}
	for r, o := range f.runs {
		if r.lambda != 1e-2 || len(o.states) != 1 || o.states[0] == nil {
			t.Errorf("left: %+v with %d states", r, len(o.states))
		}
	}
}
