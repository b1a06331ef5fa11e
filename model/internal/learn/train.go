package learn

import (
	"math"
	"math/rand/v2"

	"labelweir/model/internal/chain"
	"labelweir/model/internal/forest"
	"labelweir/model/internal/noise"
)

// Trees is the number of trees of each forest for n training rows: more where they are cheap.
func Trees(n int) int { return min(max(400000/max(n, 1), 100), 300) }

// bag is the share of rows a tree is grown on: that of distinct rows in a bootstrap sample.
const bag = 0.632

// Grow grows the forests of a fold on the listed rows.
func Grow(d *Data, rows []int32, rng *rand.Rand) *Grown {
	trees := Trees(len(rows))
	deep := forest.Options{Trees: trees, MaxDepth: 30, MinLeaf: 1, Bag: bag}
	g := &Grown{rows: rows, labels: make([]int32, len(rows)), chance: make([]float64, len(rows)*d.Classes)}
	for i, r := range rows {
		g.labels[i] = d.Labels[r]
	}
	raw := forest.Grow(d.Bins, rows, g.labels, nil, d.Classes, deep, rng)
	g.forests[Raw] = raw
	g.clean(d, raw)
	g.forests[Cleaned] = forest.Grow(d.Bins, rows, nil, g.chance, d.Classes, deep, rng)
	shallow := deep
	shallow.MaxDepth, shallow.MinLeaf = 8, 5
	g.forests[Shallow] = forest.Grow(d.Bins, rows, nil, g.chance, d.Classes, shallow, rng)
	return g
}

// Grown is the forests of a fold and the cleaned labels of its training rows.
type Grown struct {
	rows    []int32
	labels  []int32
	chance  []float64 // len(rows)·classes: how probable each class is after cleaning
	forests [forests]*forest.Grown
}

// clean replaces the labels by the most probable ones, as the out-of-bag votes of the raw forest and a quick noise fit
// see them. Nothing of the fold's held-out rows comes in.
func (g *Grown) clean(d *Data, raw *forest.Grown) {
	k := d.Classes
	nd := &noise.Data{Classes: k, Observed: append([]int32(nil), g.labels...), Members: [][]float64{make([]float64, len(g.rows)*k)}}
	if d.Source != nil {
		nd.Sources = d.Sources
		nd.Source = make([]int32, len(g.rows))
		for i, r := range g.rows {
			nd.Source[i] = d.Source[r]
		}
	}
	var scratch []int32
	for i := range g.rows {
		dst := nd.Members[0][i*k : i*k+k]
		raw.OutOfBag(i, dst, scratch)
		logShares(dst, raw.Trees())
	}
	layer, _ := noise.Quick(nd)
	layer.Clean(nd, g.chance)
}

// Train fits linear scorers for the given designs and λ at every q of qs, and returns a scorer of them all, settings in
// the order design, λ, q.
func Train(d *Data, g *Grown, which []int, qs []float64, rng *rand.Rand, s *chain.Scratch) *Scorer {
	out := &Scorer{Classes: d.Classes}
	for i, f := range g.forests {
		if f != nil {
			out.Forests[i] = f.Forest
		}
	}
	for _, di := range which {
		m := g.matrix(d, &designs[di])
		for _, lambda := range designs[di].Lambdas {
			at := len(out.Linear)
			for _, q := range qs {
				out.Linear = append(out.Linear, Linear{Setting: Setting{di, lambda, q}})
			}
			for a := range d.Classes {
				for b := a + 1; b < d.Classes; b++ {
					p := g.pair(d, m, a, b, lambda)
					if p == nil {
						continue
					}
					states := chain.Graduated(p, nil, qs, rng, s)
					for j := range qs {
						out.Linear[at+j].Pairs = append(out.Linear[at+j].Pairs, Pair{A: a, B: b, W: states[j].W})
					}
				}
			}
		}
	}
	return out
}

// matrix is the design matrix of the training rows.
func (g *Grown) matrix(d *Data, des *Design) *chain.Design {
	n, x, wide := len(g.rows), d.X, d.Dense
	if des.Kernel > 0 {
		x, wide = d.Smooth[des.Kernel-1], d.Kernels[des.Kernel-1].Size()+1
	}
	m := &chain.Design{N: n, Dense: wide, X: make([]float32, n*wide)}
	for i, r := range g.rows {
		dst, src := m.X[i*wide:(i+1)*wide], x[int(r)*wide:int(r+1)*wide]
		for j, v := range src {
			dst[j] = v * float32(des.Number)
		}
		dst[wide-1] = 1
	}
	if des.Leaf > 0 {
		f := g.forests[des.Forest]
		m.Trees, m.LeafCols, m.Leaves = f.Trees(), f.Leaves, f.Leaf
		m.LeafValue = des.Leaf / math.Sqrt(float64(f.Trees()))
	}
	return m
}

// pair is the problem of classes a (+1) and b (−1) by observed label, both with equal total weight; nil when a class
// has no row.
func (g *Grown) pair(d *Data, m *chain.Design, a, b int, lambda float64) *chain.Problem {
	p := &chain.Problem{Design: m, Lambda: lambda}
	na, nb := 0, 0
	for i, r := range g.rows {
		switch d.Labels[r] {
		case int32(a):
			p.Rows, p.Y = append(p.Rows, int32(i)), append(p.Y, 1)
			na++
		case int32(b):
			p.Rows, p.Y = append(p.Rows, int32(i)), append(p.Y, -1)
			nb++
		}
	}
	if na == 0 || nb == 0 {
		return nil
	}
	p.Omega = make([]float64, len(p.Rows))
	for i, y := range p.Y {
		if y > 0 {
			p.Omega[i] = 0.5 / float64(na)
		} else {
			p.Omega[i] = 0.5 / float64(nb)
		}
	}
	return p
}
