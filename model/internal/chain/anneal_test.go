package chain

import (
	"math"
	"math/bits"
	"math/rand/v2"
	"testing"
)

// enumerate returns the lowest J_q over all weights of b bits within ±radius, by walking every code in Gray order
// with margins updated for the one bit that changes. Nothing of the code under test is used.
func enumerate(p *Problem, q, radius float64, b int) float64 {
	n, cols := len(p.Rows), p.Columns()
	col := make([][]float64, cols)
	for c := range col {
		col[c] = make([]float64, n)
	}
	for k, r := range p.Rows {
		for c := range p.Dense {
			col[c][k] = float64(p.Y[k]) * float64(p.X[int(r)*p.Dense+c])
		}
		for _, leaf := range p.Leaves[int(r)*p.Trees : (int(r)+1)*p.Trees] {
			col[p.Dense+int(leaf)][k] = float64(p.Y[k]) * p.LeafValue
		}
	}
	step := radius / float64(int(1)<<(b-1))
	w := make([]float64, cols)
	m := make([]float64, n)
	for c := range w {
		w[c] = -radius
		for k := range m {
			m[k] += w[c] * col[c][k]
		}
	}
	best := math.Inf(1)
	code := make([]int, cols)
	for g := uint64(0); ; {
		var j float64
		for k, v := range m {
			h := math.Max(0, 1-v)
			j += p.Omega[k] * math.Min((1-q)*(1-q), h*h)
		}
		for _, v := range w {
			j += p.Lambda * v * v
		}
		best = math.Min(best, j)
		if g++; g == 1<<(b*cols) {
			return best
		}
		bit := bits.TrailingZeros64(g)
		c := bit / b
		code[c] ^= 1 << (bit % b)
		next := float64(code[c])*step - radius
		d := next - w[c]
		w[c] = next
		for k := range m {
			m[k] += d * col[c][k]
		}
	}
}

// small draws an instance of at most 20 weight bits.
func small(rng *rand.Rand, most int) (p *Problem, b int) {
	for {
		b = 2 + rng.IntN(5)
		d := 1 + rng.IntN(6)
		trees, width := rng.IntN(3), 2
		if b*(d+1+trees*width) > most {
			continue
		}
		n := 8 + rng.IntN(25)
		p, _ = linear(n, d, trees, width, .4*rng.Float64(), rng)
		p.Lambda = math.Exp(math.Log(1e-3) + rng.Float64()*math.Log(100))
		return p, b
	}
}

// The truth is found by trying every weight vector of the lattice.
func TestAnnealerFindsTheProvenOptimum(t *testing.T) {
	const instances = 220
	qs := []float64{-1, -.5, 0}
	var found int
	for k := range instances {
		rng := newRand(uint64(1000 + k))
		most := 16
		if k%50 == 0 {
			most = 20
		}
		p, b := small(rng, most)
		q := qs[rng.IntN(3)]
		want := enumerate(p, q, 1/math.Sqrt(p.Lambda), b)
		opt := AnnealOptions{Bits: b, Sweeps: 1000, Cycles: 20, Hot: .3, Cold: 3e-3, Bounded: true}
		got := Annealed(p, q, nil, opt, rng, &Scratch{})
		if j := objective(p, q, got.W); math.Abs(j-got.J) > 1e-9 {
			t.Fatalf("instance %d: J=%v, from its weights %v", k, got.J, j)
		}
		if got.J > want+1e-9 {
			t.Errorf("instance %d (%d bits × %d columns, q=%v): annealed %.9f, optimum %.9f", k, b, p.Columns(), q, got.J, want)
			continue
		}
		found++
	}
	t.Logf("%d of %d optima found", found, instances)
}
