package chain

import "fmt"

// Design is the design matrix that problems share. A row is a dense block, row-major in X (N×Dense; the caller's last
// dense column is the constant 1), and Trees leaf indicators, row-major in Leaves (N×Trees): column ids in
// [0, LeafCols), different within a row, each of the value LeafValue. It is read only.
type Design struct {
	N, Dense  int
	X         []float32
	Trees     int
	LeafCols  int
	Leaves    []int32
	LeafValue float64
}

// Problem is one pair of classes on a subset of the rows of a design.
type Problem struct {
	*Design
	Rows   []int32   // rows of the design
	Y      []int8    // ±1, one an entry of Rows
	Omega  []float64 // weights ≥ 0, one an entry of Rows, sum 1
	Lambda float64   // > 0
}

// Columns is the length of a weight vector: the dense columns, then the leaves.
func (d *Design) Columns() int { return d.Dense + d.LeafCols }

// check panics where the slices of p do not fit together: that is a caller's mistake, not bad data.
func (p *Problem) check() {
	n := len(p.Rows)
	if len(p.Y) != n || len(p.Omega) != n {
		panic(fmt.Sprintf("chain: %d rows, %d labels, %d weights", n, len(p.Y), len(p.Omega)))
	}
	if len(p.X) != p.N*p.Dense || len(p.Leaves) != p.N*p.Trees {
		panic(fmt.Sprintf("chain: shapes differ: %d×%d dense has %d, %d×%d leaves has %d", p.N, p.Dense, len(p.X), p.N, p.Trees, len(p.Leaves)))
	}
	if !(p.Lambda > 0) {
		panic("chain: lambda must be positive")
	}
}
