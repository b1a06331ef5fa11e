package learn

import (
	"math/rand/v2"

	"labelweir/model/internal/forest"
	"labelweir/model/internal/kernel"
)

// made is a table of n rows with d numbers about a centre of each class, encoded as the learners read it. Some labels
// are wrong.
func made(n, d, classes, sources int, seed uint64) *Data {
	rng := rand.New(rand.NewPCG(seed, 1))
	m := &Data{Classes: classes, Dense: d + 1, Sources: sources, Bins: &forest.Bins{N: n, D: d}}
	centre := make([]float64, classes*d)
	for i := range centre {
		centre[i] = 0.5 * rng.NormFloat64()
	}
	for i := range n {
		c := rng.IntN(classes)
		for j := range d {
			v := centre[c*d+j] + 0.4*rng.NormFloat64()
			m.X = append(m.X, float32(v))
			m.Bins.Rows = append(m.Bins.Rows, uint8(min(max(16*(v+2), 0), 63)))
		}
		m.X = append(m.X, 1)
		if rng.IntN(8) == 0 {
			c = rng.IntN(classes)
		}
		m.Labels = append(m.Labels, int32(c))
		m.Keys = append(m.Keys, rng.Uint64())
		if sources > 0 {
			m.Source = append(m.Source, int32(i%sources))
		}
	}
	m.Bins.Cols = make([][]uint8, d)
	for i := range n * d {
		m.Bins.Cols[i%d] = append(m.Bins.Cols[i%d], m.Bins.Rows[i])
	}
	m.smooth()
	for a := range classes {
		for b := a + 1; b < classes; b++ {
			m.Pairs = append(m.Pairs, [2]int{a, b})
		}
	}
	return m
}

// smooth makes the kernels and their features.
func (d *Data) smooth() {
	for j, gamma := range KernelGammas {
		k := kernel.New(d.X, d.Rows(), d.Dense, d.Dense-1, 20, gamma, rand.New(rand.NewPCG(9, uint64(j))))
		w := k.Size() + 1
		x, scratch := make([]float32, d.Rows()*w), make([]float64, k.Size())
		for i := range d.Rows() {
			k.Features(d.X[i*d.Dense:(i+1)*d.Dense], x[i*w:(i+1)*w-1], scratch)
			x[(i+1)*w-1] = 1
		}
		d.Kernels, d.Smooth = append(d.Kernels, k), append(d.Smooth, x)
	}
}

// dealt puts rows into folds.
func dealt(d *Data, folds int) []uint8 {
	out := make([]uint8, d.Rows())
	for i, k := range d.Keys {
		out[i] = uint8(k % uint64(folds))
	}
	return out
}
