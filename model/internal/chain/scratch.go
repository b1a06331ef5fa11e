package chain

import (
	"fmt"
	"math/rand/v2"
)

// Scratch is the working memory of runs. Its zero value is ready; reuse saves allocation. It belongs to one goroutine.
//
// A problem's rows are packed into it in a random order, so that an epoch walks memory forward and still meets the
// rows in an order that has nothing to do with their labels. Runs of few epochs save the packing and read the rows where
// they are.
type Scratch struct {
	n, dense, trees int
	value           float64 // of a leaf indicator
	lambda          float64

	perm   []int32   // packed row → entry of the problem's Rows
	row    []int32   // packed row → row of x and leaves
	x      []float32 // dense numbers a row
	leaves []int32   // trees columns a row, the first leaf column being 0; not read where thin is
	thin   []uint16  // the same for few enough columns, already offset by dense; nil otherwise

	rows    []int32 // memory of row, x, leaves and thin
	numbers []float32
	columns []int32
	thins   []uint16

	y     []float64 // ±1
	omega []float64
	ratio []float64 // λ/ω
	denom []float64 // ‖x‖² + λ/ω

	wide   []float64 // narrow or more weights, of which w is the front
	w      []float64 // dense, then leaves
	alpha  []float64
	keep   []bool
	margin []float64 // as of the last renewal
	active []int32   // packed rows an epoch visits
	blocks []int32   // starts of runs of active, shuffled each epoch

	hold   int // epochs between renewals of the flags
	epochs int // since load

	at        int // names the present w; another after every change
	marginsAt int // the w that margin was measured at
	named     int // names given so far

	kept  [2]float64 // share of the weight of class −1 and +1 above q, as of the last measure
	stray bool       // the last cycle ended elsewhere than at its best point
	best  mark       // best point met at the present q
	here  mark       // where a shaken run stands
	top   mark       // the lowest point of a shaken run

	lattice lattice // of annealed runs

	room []float32 // see Room
}

// Room lends memory for n numbers of any value, for a design that is made anew again and again. It is the caller's until the
// next call; runs do not touch it.
func (s *Scratch) Room(n int) []float32 {
	s.room = resize(s.room, n)
	return s.room
}

// resize gives s length n without keeping its contents.
func resize[T any](s []T, n int) []T {
	if cap(s) < n {
		return make([]T, n)
	}
	return s[:n]
}

// load packs p with all rows kept, every α and weight zero; in the rows' own order without an rng.
func (s *Scratch) load(p *Problem, rng *rand.Rand) {
	s.begin(p)
	n := s.n
	s.rows = resize(s.rows, n)
	s.numbers = resize(s.numbers, n*p.Dense)
	s.row, s.x = s.rows, s.numbers
	if p.Columns() <= narrow {
		s.thins = resize(s.thins, n*p.Trees)
		s.thin, s.leaves = s.thins, nil
	} else {
		s.columns = resize(s.columns, n*p.Trees)
		s.thin, s.leaves = nil, s.columns
	}
	if rng != nil {
		rng.Shuffle(n, func(a, b int) { s.perm[a], s.perm[b] = s.perm[b], s.perm[a] })
	}
	for i, k := range s.perm {
		s.row[i] = int32(i)
		s.pack(p, i, int(p.Rows[k]))
		s.weigh(p, i, int(k))
	}
	s.hold = s.holdFor()
	s.reset()
}

// view is load without packing: rows stay where and as they are, and p is not to be changed as long as the run lasts.
func (s *Scratch) view(p *Problem) {
	s.begin(p)
	s.row, s.x, s.leaves, s.thin = p.Rows, p.X, p.Leaves, nil
	for i := range s.perm {
		s.weigh(p, i, i)
	}
	s.hold = s.holdFor()
	s.reset()
}

// begin makes room for p's rows, in their own order.
func (s *Scratch) begin(p *Problem) {
	p.check()
	n := len(p.Rows)
	s.n, s.dense, s.trees, s.value, s.lambda, s.epochs = n, p.Dense, p.Trees, p.LeafValue, p.Lambda, 0
	s.perm = resize(s.perm, n)
	for i := range s.perm {
		s.perm[i] = int32(i)
	}
	s.wide = resize(s.wide, max(narrow, p.Columns()))
	s.w = s.wide[:p.Columns()]
	s.y, s.omega = resize(s.y, n), resize(s.omega, n)
	s.ratio, s.denom = resize(s.ratio, n), resize(s.denom, n)
	s.alpha = resize(s.alpha, n)
	s.keep, s.margin = resize(s.keep, n), resize(s.margin, n)
	s.active = resize(s.active, n)[:0]
}

// holdFor is the number of epochs that w needs to follow a change of the flags. An epoch of dual ascent shrinks the
// distance to the optimum about by ‖x‖²/(λ/ω) + 1 (Shalev-Shwartz & Zhang 2013), so two do when rows are many and the
// few rows of a small problem, each of which weighs more than λ, need some more.
func (s *Scratch) holdFor() int {
	const least, most = 2, 8
	var load float64
	for i, r := range s.ratio {
		load += (s.denom[i] - r) / r
	}
	return min(most, least+int(2*load/float64(max(1, s.n))))
}

// tiny stands in for a weight of zero, whose row then has no say but does no harm.
const tiny = 1e-300

// pack copies row r of the design to packed row i.
func (s *Scratch) pack(p *Problem, i, r int) {
	copy(s.x[i*s.dense:(i+1)*s.dense], p.X[r*p.Dense:(r+1)*p.Dense])
	from := p.Leaves[r*p.Trees : (r+1)*p.Trees]
	if s.thin == nil {
		copy(s.leaves[i*s.trees:], from)
		return
	}
	to, shift := s.thin[i*s.trees:][:len(from)], int32(s.dense)
	for t, c := range from {
		to[t] = uint16(c + shift)
	}
}

// weigh sets what the steps along packed row i, which is entry k of the problem, depend on.
func (s *Scratch) weigh(p *Problem, i, k int) {
	norm := float64(p.Trees)*p.LeafValue*p.LeafValue + squares32(s.number(i))
	s.y[i], s.omega[i] = float64(p.Y[k]), p.Omega[k]
	s.ratio[i] = p.Lambda / max(p.Omega[k], tiny)
	s.denom[i] = norm + s.ratio[i]
}

// reset puts the run back to zero weights with every row kept.
func (s *Scratch) reset() {
	clear(s.w)
	clear(s.alpha)
	for i := range s.keep {
		s.keep[i] = true
	}
	s.moved()
}

// moved gives the present w a new name.
func (s *Scratch) moved() {
	s.named++
	s.at = s.named
}

// state copies the run's state out, in the order of the problem's rows.
func (s *Scratch) state(q, j float64, collapsed bool, status Status) State {
	st := State{W: make([]float64, len(s.w)), Alpha: make([]float64, s.n), Keep: make([]bool, s.n),
		Q: q, J: j, Collapsed: collapsed, Status: status, Epochs: s.epochs}
	copy(st.W, s.w)
	for i, k := range s.perm {
		st.Alpha[k], st.Keep[k] = s.alpha[i], s.keep[i]
	}
	return st
}

// restore takes α and flags from st and rebuilds the weights from them.
func (s *Scratch) restore(st *Start) {
	if len(st.Alpha) != s.n || len(st.Keep) != s.n || st.New != nil && len(st.New) != s.n {
		panic(fmt.Sprintf("chain: start of %d rows for %d", len(st.Alpha), s.n))
	}
	clear(s.w)
	for i, k := range s.perm {
		s.keep[i], s.alpha[i] = st.Keep[k], 0
		if a := st.Alpha[k]; s.keep[i] && a > 0 {
			s.alpha[i] = a
			s.add(i, a*s.y[i])
		}
	}
	s.moved()
}
