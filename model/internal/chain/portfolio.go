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
	Anneal     AnnealOptions // of each annealed run
	Anneals    int           // annealed runs, by turns from the best so far and from zero weights
	Hops       int           // of the shaken run; 0: none
	Hysteresis float64       // share of J by which another run must beat the warm one
}

// DefaultPortfolio is the full portfolio for a problem of so many rows. Small problems have the rougher objectives and
// the cheaper epochs, so they get more runs and hops.
func DefaultPortfolio(rows int) PortfolioOptions {
	rows = max(1, rows)
	opt := PortfolioOptions{WarmEpochs: 5, Cold: true, Anneal: DefaultAnneal(), Hysteresis: 1e-3}
	opt.Anneals = min(4, max(1, 12_000/rows))
	opt.Hops = min(240, max(4, 120_000/rows))
	return opt
}

// QuickPortfolio is the graduated run, or the warm one if there is a start, and few hops: two or three times its cost.
func QuickPortfolio(rows int) PortfolioOptions {
	return PortfolioOptions{WarmEpochs: 5, Hops: min(40, max(2, 20_000/max(1, rows))), Hysteresis: 1e-3}
}

// Run is one member of a portfolio.
type Run struct {
	Name  string
	State State
}

// Portfolio makes several runs for one q and returns them in the order made, with the index of the one to use: the
// best, or the warm one within the hysteresis of it. from is where the warm run begins (see Carry), nil for a cold
// start.
func Portfolio(p *Problem, q float64, from *Start, opt PortfolioOptions, rng *rand.Rand, s *Scratch) (runs []Run, use int) {
	best, running := 0, -1
	add := func(name string, st State) {
		runs = append(runs, Run{name, st})
		if Less(&st, &runs[best].State) {
			best = len(runs) - 1
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
	if opt.Anneals > 0 {
		add(NameAnnealed, anneals(p, q, &runs[best].State, opt, rng, s))
	}
	if opt.Hops > 0 {
		add(NameShaken, shakes(p, q, runs, best, opt.Hops, rng, s))
	}
	if running >= 0 && holds(&runs[running].State, &runs[best].State, opt.Hysteresis) {
		return runs, running
	}
	return runs, best
}

// anneals is the best of the annealed runs.
func anneals(p *Problem, q float64, from *State, opt PortfolioOptions, rng *rand.Rand, s *Scratch) State {
	best := Annealed(p, q, from, opt.Anneal, rng, s)
	for k := 1; k < opt.Anneals; k++ {
		start := from
		if k%2 == 1 {
			start = nil
		}
		if st := Annealed(p, q, start, opt.Anneal, rng, s); Less(&st, &best) {
			best = st
		}
	}
	return best
}

// shakes is the shaken run from the better of the warm and the graduated run, and another of half the hops from the best
// run if that is another: a low start that is hard to leave must not be the only one.
func shakes(p *Problem, q float64, runs []Run, best, hops int, rng *rand.Rand, s *Scratch) State {
	base := 0
	if len(runs) > 1 && runs[1].Name == NameGraduated && Less(&runs[1].State, &runs[0].State) {
		base = 1
	}
	st := Shaken(p, q, &runs[base].State, hops, rng, s)
	if best != base {
		if other := Shaken(p, q, &runs[best].State, hops/2, rng, s); Less(&other, &st) {
			st = other
		}
	}
	return st
}

// Winner is the index of the first run that is as good as the best to a ten-thousandth of J: later runs start from
// earlier ones and win by the last digits of convergence alone.
func Winner(runs []Run) int {
	const same = 1e-4
	best := 0
	for k := range runs {
		if Less(&runs[k].State, &runs[best].State) {
			best = k
		}
	}
	b := &runs[best].State
	for k := range runs {
		if st := &runs[k].State; st.Collapsed == b.Collapsed && st.J <= b.J*(1+same) {
			return k
		}
	}
	return best
}
