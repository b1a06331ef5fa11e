package fresh

import (
	"math"

	"labelweir/model/internal/forest"
)

// Rows is the most rows of a block for rows of this many numbers and bins: enough that a tree, once in the cache, is
// used many times, few enough that the block stays there too.
func (m *Machine) Rows() int { return min(max(1<<20/(4*m.Dense+m.Bins), 16), 1024) }

// Scratch is the memory of one block. It belongs to one goroutine.
type Scratch struct {
	X       []float32   // rows·Dense, the constant included: to be filled before Score
	Bins    []uint8     // rows·Bins: to be filled before Score; what lies behind is not read as such
	Members [][]float64 // by member: rows·classes class scores, filled by Score

	acc    [][]uint64  // by forest: see Forest.sum
	sums   [][]float64 // by forest: rows·columns
	smooth [][]float32 // by kernel: the values of one row
}

// NewScratch returns scratch for blocks of m.Rows() rows.
func (m *Machine) NewScratch() *Scratch {
	n := m.Rows()
	s := &Scratch{X: make([]float32, n*m.Dense), Bins: make([]uint8, n*m.Bins+forest.Reach)}
	for range m.Members {
		s.Members = append(s.Members, make([]float64, n*m.Classes))
	}
	for i := range m.Forests {
		s.acc = append(s.acc, make([]uint64, n*2*m.Forests[i].words()))
		s.sums = append(s.sums, make([]float64, n*len(m.Forests[i].Low)))
	}
	for i := range m.Kernels {
		s.smooth = append(s.smooth, m.Kernels[i].room())
	}
	return s
}

// Score fills s.Members for the first n rows of s.X and s.Bins, n ≤ m.Rows(). A row's scores do not depend on the rows
// beside it.
func (m *Machine) Score(s *Scratch, n int) {
	for i := range m.Forests {
		m.Forests[i].sum(s.Bins, m.Bins, n, s.acc[i], s.sums[i])
	}
	for r := range n {
		x := s.X[r*m.Dense : (r+1)*m.Dense-1]
		for i := range m.Kernels {
			m.Kernels[i].values(x, s.smooth[i])
		}
		for i := range m.Members {
			p := &m.Members[i]
			dst := s.Members[i][r*m.Classes : (r+1)*m.Classes]
			if p.Linear {
				m.linear(p, s, r, x, dst)
			} else {
				m.vote(p, s, r, dst)
			}
		}
	}
}

// vote writes the centred logarithms of the mean class shares, floored at half a tree's vote.
func (m *Machine) vote(p *Member, s *Scratch, r int, dst []float64) {
	f := &m.Forests[p.Forest]
	trees := float64(len(f.trees))
	sum := s.sums[p.Forest][r*len(f.Low)+p.At:]
	mean := 0.0
	for c := range dst {
		dst[c] = math.Log(max(sum[c]/trees, 0.5/trees))
		mean += dst[c]
	}
	mean /= float64(len(dst))
	for c := range dst {
		dst[c] -= mean
	}
}

// linear writes the scaled sums of the clipped pair decisions.
func (m *Machine) linear(p *Member, s *Scratch, r int, x []float32, dst []float64) {
	clear(dst)
	var leaves []float64
	if p.Forest >= 0 {
		w := len(m.Forests[p.Forest].Low)
		leaves = s.sums[p.Forest][r*w+p.At : (r+1)*w]
	}
	in, w := x, p.Weight
	if p.Kernel >= 0 {
		in, w = s.smooth[p.Kernel], p.Smooth
	}
	for i := range p.Pairs {
		pair := &p.Pairs[i]
		v := pair.Bias + float64(dot(in, w[i*len(in):(i+1)*len(in)]))
		if leaves != nil {
			v += leaves[i]
		}
		v = min(max(v, -p.Clip), p.Clip) * p.Scale
		dst[pair.A] += v
		dst[pair.B] -= v
	}
}

// dot is Σ x·w in four sums, so that additions need not wait for each other.
func dot(x, w []float32) float32 {
	w = w[:len(x)]
	var a, b, c, d float32
	for len(x) >= 4 && len(w) >= 4 {
		a += x[0] * w[0]
		b += x[1] * w[1]
		c += x[2] * w[2]
		d += x[3] * w[3]
		x, w = x[4:], w[4:]
	}
	for i, v := range x {
		a += v * w[i]
	}
	return (a + b) + (c + d)
}
