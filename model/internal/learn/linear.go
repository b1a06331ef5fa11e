package learn

import (
	"math"
	"math/rand/v2"
	"slices"

	"labelweir/model/internal/chain"
)

// run names one optimisation: a design, λ and a pair of classes.
type run struct {
	design int
	lambda float64
	a, b   int
}

// done is what a run left: its rows and, for each q it was solved at, its state.
type done struct {
	rows   []int32
	labels []int8
	states map[float64]*chain.State
}

// Tally counts what one kind of chain did.
type Tally struct {
	Name       string
	Tried, Won int
	Gap        float64 // sum over its tries of (J − best J)/best J
}

// AddTally adds more to all, by name.
func AddTally(all, more []Tally) []Tally {
	for _, m := range more {
		at := slices.IndexFunc(all, func(t Tally) bool { return t.Name == m.Name })
		if at < 0 {
			all = append(all, Tally{Name: m.Name})
			at = len(all) - 1
		}
		all[at].Tried += m.Tried
		all[at].Won += m.Won
		all[at].Gap += m.Gap
	}
	return all
}

// Solve fits linear scorers of one design and λ at every q of qs: along one graduated run when cold, from the last
// states when warm, each then followed by the portfolio's other chains, if o asks for any. take gets the pairs of each q
// as they are done: weights of all pairs at once would be most of the memory of a search over many classes. Solve returns
// how the chains did; a design that d has no features for gives nothing.
func (f *Fold) Solve(d *Data, design int, lambda float64, qs []float64, o chain.PortfolioOptions, rng *rand.Rand, s *chain.Scratch, take func(q int, p Pair)) []Tally {
	des := &Designs[design]
	if des.Kernel > 0 && d.Kernels[des.Kernel-1] == nil || des.Leaf > 0 && d.Leafless {
		return nil
	}
	m := f.matrix(d, des, s)
	if f.runs == nil {
		f.runs = make(map[run]*done)
	}
	var tally []Tally
	for _, ab := range d.Pairs {
		p := f.pair(d, m, ab[0], ab[1], lambda)
		if p == nil {
			continue
		}
		r := run{design, lambda, ab[0], ab[1]}
		states := f.solve(d, p, f.runs[r], qs, o, &tally, rng, s)
		for j := range qs {
			take(j, Pair{A: ab[0], B: ab[1], W: states[j].W})
			states[j].W = nil // a warm run builds its own
		}
		if !f.Once {
			f.runs[r] = keep(p, qs, states)
		}
	}
	return tally
}

// Forget drops what a search left behind of other settings than the listed ones.
func (f *Fold) Forget(but []Setting) {
	for r, o := range f.runs {
		for q := range o.states {
			if !slices.Contains(but, Setting{r.design, r.lambda, q}) {
				delete(o.states, q)
			}
		}
		if len(o.states) == 0 {
			delete(f.runs, r)
		}
	}
}

// keep remembers states by the rows of the data.
func keep(p *chain.Problem, qs []float64, states []chain.State) *done {
	o := &done{rows: p.Rows, labels: p.Y, states: make(map[float64]*chain.State)}
	for j, q := range qs {
		o.states[q] = &states[j]
	}
	return o
}

// path is a short graduation: the ranking it gives is as good as that of the objective's last digit.
var path = []chain.Stage{
	{Q: math.Inf(-1), Rounds: 2, Tolerance: loose},
	{Q: -2, Rounds: 1, Tolerance: loose},
	{Q: -1.4, Rounds: 1, Tolerance: loose},
	{Q: -1, Rounds: 3, Tolerance: loose},
	{Q: -0.75, Rounds: 1, Tolerance: loose},
	{Q: -0.5, Rounds: 3, Tolerance: loose},
	{Q: -0.3, Rounds: 1, Tolerance: loose},
	{Q: -0.15, Rounds: 1, Tolerance: loose},
	{Q: 0, Rounds: 3, Tolerance: loose},
}

// loose is the projected gradient, in units of the margin, at which a stage of path may end.
const loose = 3e-2

func (f *Fold) solve(d *Data, p *chain.Problem, last *done, qs []float64, o chain.PortfolioOptions, tally *[]Tally, rng *rand.Rand, s *chain.Scratch) []chain.State {
	var index []int32
	var changed []bool
	if d.Old != nil && last != nil {
		index, changed = carried(d, p, last)
	} else if o.Anneals == 0 && o.Hops == 0 {
		*tally = AddTally(*tally, []Tally{{Name: chain.NameGraduated, Tried: len(qs), Won: len(qs)}})
		return chain.Graduated(p, path, qs, rng, s)
	}
	out := make([]chain.State, len(qs))
	for j, q := range qs {
		var from *chain.Start
		if index != nil && last.states[q] != nil {
			from = chain.Carry(last.states[q], index, changed)
		}
		runs, use := chain.Portfolio(p, q, from, o, rng, s)
		out[j] = runs[use].State
		*tally = AddTally(*tally, tallied(runs))
	}
	return out
}

func tallied(runs []chain.Run) []Tally {
	win := chain.Winner(runs)
	best := runs[win].State.J
	out := make([]Tally, len(runs))
	for i, r := range runs {
		out[i] = Tally{Name: r.Name, Tried: 1}
		if best > 0 {
			out[i].Gap = max(0, r.State.J/best-1)
		}
	}
	out[win].Won = 1
	return out
}

// carried finds, for each row of p, its entry in the problem solved before.
func carried(d *Data, p *chain.Problem, last *done) (index []int32, changed []bool) {
	top := int32(-1)
	for _, r := range last.rows {
		top = max(top, r)
	}
	at := make([]int32, top+1)
	for i := range at {
		at[i] = -1
	}
	for i, r := range last.rows {
		at[r] = int32(i)
	}
	index, changed = make([]int32, len(p.Rows)), make([]bool, len(p.Rows))
	for i, r := range p.Rows {
		index[i] = -1
		old := d.Old[r]
		if old < 0 || old > top || at[old] < 0 {
			continue
		}
		index[i] = at[old]
		changed[i] = last.labels[at[old]] != p.Y[i]
	}
	return index, changed
}

// matrix is the design matrix of all rows; its numbers may be in s and last until the next call.
func (f *Fold) matrix(d *Data, des *Design, s *chain.Scratch) *chain.Design {
	n := d.Rows()
	m := &chain.Design{N: n, Dense: d.Dense, X: d.X}
	if des.Kernel > 0 {
		m.Dense, m.X = d.Kernels[des.Kernel-1].Size()+1, d.Smooth[des.Kernel-1]
	}
	if des.Number != 1 {
		scaled := s.Room(len(m.X))
		for i, v := range m.X {
			scaled[i] = v * float32(des.Number)
		}
		for i := m.Dense - 1; i < len(scaled); i += m.Dense {
			scaled[i] = 1
		}
		m.X = scaled
	}
	if des.Leaf > 0 {
		fo := f.Forest[Cleaned]
		m.Trees, m.LeafCols, m.Leaves = len(fo.Trees), fo.Leaves(), f.leaves[Cleaned]
		m.LeafValue = des.Leaf / math.Sqrt(float64(m.Trees))
	}
	return m
}

// pair is the problem of classes a (+1) and b (−1) by observed label, both with equal total weight; nil when a class
// has no row.
func (f *Fold) pair(d *Data, m *chain.Design, a, b int, lambda float64) *chain.Problem {
	p := &chain.Problem{Design: m, Lambda: lambda}
	na, nb := 0, 0
	for _, r := range f.train {
		switch d.Labels[r] {
		case int32(a):
			p.Rows, p.Y = append(p.Rows, r), append(p.Y, 1)
			na++
		case int32(b):
			p.Rows, p.Y = append(p.Rows, r), append(p.Y, -1)
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
