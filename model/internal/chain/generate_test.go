package chain

import (
	"math"
	"math/rand/v2"
)

func newRand(seed uint64) *rand.Rand { return rand.New(rand.NewPCG(seed, 0x77)) }

// balanced gives every row of a class the same weight and every class the same total.
func balanced(y []int8) []float64 {
	var pos int
	for _, v := range y {
		if v > 0 {
			pos++
		}
	}
	o := make([]float64, len(y))
	for i, v := range y {
		if v > 0 {
			o[i] = .5 / float64(pos)
		} else {
			o[i] = .5 / float64(len(y)-pos)
		}
	}
	return o
}

// linear draws a problem whose true labels are the side of a random hyperplane, blurred, with a share flip of the
// labels turned; trees random leaf indicators of width leaves each stand beside d dense columns and the constant.
func linear(n, d, trees, width int, flip float64, rng *rand.Rand) (p *Problem, flipped []bool) {
	ds := &Design{N: n, Dense: d + 1, Trees: trees, LeafCols: trees * width}
	if trees > 0 {
		ds.LeafValue = .7 / math.Sqrt(float64(trees))
	}
	dir := make([]float64, d)
	for k := range dir {
		dir[k] = rng.NormFloat64()
	}
	p = &Problem{Design: ds, Lambda: 3e-3}
	flipped = make([]bool, n)
	for i := range n {
		var z float64
		for k := range d {
			v := rng.NormFloat64()
			z += v * dir[k]
			ds.X = append(ds.X, float32(.7*v/math.Sqrt(float64(d))))
		}
		ds.X = append(ds.X, 1)
		z += .3 * rng.NormFloat64() * math.Sqrt(float64(d))
		y := int8(1)
		if z < 0 {
			y = -1
		}
		for t := range trees {
			// half of the leaves of a tree see the side, as a tree's would
			leaf := rng.IntN(width)
			if t%2 == 0 {
				leaf = leaf/2*2 + int(y+1)/2
				leaf = min(leaf, width-1)
			}
			ds.Leaves = append(ds.Leaves, int32(t*width+leaf))
		}
		if rng.Float64() < flip {
			y, flipped[i] = -y, true
		}
		p.Rows = append(p.Rows, int32(i))
		p.Y = append(p.Y, y)
	}
	p.Omega = balanced(p.Y)
	return p, flipped
}

// objective computes J_q(w) from the definition, without any of the code under test.
func objective(p *Problem, q float64, w []float64) float64 {
	var j float64
	for k, r := range p.Rows {
		var s float64
		for c, v := range p.X[int(r)*p.Dense : (int(r)+1)*p.Dense] {
			s += float64(v) * w[c]
		}
		for _, c := range p.Leaves[int(r)*p.Trees : (int(r)+1)*p.Trees] {
			s += p.LeafValue * w[p.Dense+int(c)]
		}
		h := math.Max(0, 1-float64(p.Y[k])*s)
		j += p.Omega[k] * math.Min((1-q)*(1-q), h*h)
	}
	for _, v := range w {
		j += p.Lambda * v * v
	}
	return j
}
