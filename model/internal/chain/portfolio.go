package chain

import "math/rand/v2"

// The names of the kinds of run.
const (
	NameWarm      = "warm"
	NameGraduated = "graduated"
	NameDescent   = "descent"
	NameAnnealed  = "annealed"
	NameShaken    = "shaken"
)

// PortfolioOptions says which runs a portfolio makes. DefaultPortfolio gives all of it.
type PortfolioOptions struct {
	WarmEpochs int           // epochs of the warm run, if there is a start
	Cold       bool          // make the cold runs, graduated and plain descent, even if there is a start
	Anneal     AnnealOptions // from the best of the runs before it; Sweeps 0: none
	Hops       int           // of the shaken run, from the best of the runs before it; 0: none
	Hysteresis float64       // share of J by which another run must beat the warm one
}

// DefaultPortfolio is the full portfolio for a problem of so many rows. Small problems have the rougher objectives and
// the cheaper epochs, so they get more hops.
func DefaultPortfolio(rows int) PortfolioOptions {
	return PortfolioOptions{WarmEpochs: 5, Cold: true, Anneal: DefaultAnneal(),
		Hops: min(60, max(4, 60_000/max(1, rows))), Hysteresis: 1e-3}
}

// Run is one member of a portfolio.
type Run struct {
	Name  string
	State State
}

// Portfolio makes several runs for one q and returns them in the order made, with the index of the one to use. from is
// the running state by the rows of p (see Carry), nil for a cold start. The annealed and the shaken run begin at the
// best before them and end no higher; of runs as deep as each other to a millionth the first counts as the winner.
func Portfolio(p *Problem, q float64, from *State, opt PortfolioOptions, rng *rand.Rand, s *Scratch) (runs []Run, best int) {
	const same = 1e-6
	running := -1
	add := func(name string, st State) {
		runs = append(runs, Run{name, st})
		b := &runs[best].State
		if k := len(runs) - 1; k > 0 && Less(&st, b) && (st.Collapsed != b.Collapsed || st.J < b.J*(1-same)) {
			best = k
		}
	}
	if from != nil {
		running = 0
		add(NameWarm, Warm(p, q, from, opt.WarmEpochs, rng, s))
	}
	if from == nil || opt.Cold {
		add(NameGraduated, Graduated(p, nil, []float64{q}, rng, s)[0])
		add(NameDescent, Descend(p, q, rng, s))
	}
	if opt.Anneal.Sweeps > 0 {
		add(NameAnnealed, Annealed(p, q, &runs[best].State, opt.Anneal, rng, s))
	}
	if opt.Hops > 0 {
		add(NameShaken, Shaken(p, q, &runs[best].State, opt.Hops, rng, s))
	}
	if running >= 0 && best != running && holds(&runs[running].State, &runs[best].State, opt.Hysteresis) {
		best = running
	}
	return runs, best
}
