package chain

import (
	"math"
	"math/rand/v2"
)

// AnnealOptions sets an annealing run. DefaultAnneal gives all of it.
type AnnealOptions struct {
	Bits    int     // of a weight, 2 to 16
	Sweeps  int     // proposals a column and cooling
	Cycles  int     // coolings, each from the best point so far
	Hot     float64 // temperature at the start of a cooling, as a share of J at the run's start
	Cold    float64 // and at its end
	Polish  bool    // continue with continuous weights by dual ascent from the flags found
	Bounded bool    // range of weights ±1/√λ even if the start's objective proves a smaller one
}

// DefaultAnneal is 5-bit weights cooled once over 40 sweeps from 0.05 to 10⁻⁴ of J, and polish.
func DefaultAnneal() AnnealOptions {
	return AnnealOptions{Bits: 5, Sweeps: 40, Cycles: 1, Hot: .05, Cold: 1e-4, Polish: true}
}

// few is the number of columns up to which every accepted move, not only every sweep, is compared with the best.
const few = 64

// Annealed searches over weights of so many bits within ±√(J/λ), J the objective of the start, by single bit flips with
// chance min(1, exp(−ΔJ/T)) while T falls geometrically, and then polishes. from nil starts from zero weights, where
// J = 1. No weight of a better point can lie outside that range, since λ‖w‖² ≤ J. Without polish the state is the best
// point of the lattice met, its Alpha all zero. Cost O(Cycles·Sweeps·rows·(Dense+Trees)).
//
// Weights as bits follow arXiv:1205.1148, the cooling Kirkpatrick, Gelatt & Vecchi 1983.
func Annealed(p *Problem, q float64, from *State, opt AnnealOptions, rng *rand.Rand, s *Scratch) State {
	s.load(p, rng)
	start := 1.
	if from != nil {
		s.restore(from.Start())
		start = s.measure(q)
	}
	s.remember(s.measure(q))
	radius := math.Sqrt(start / p.Lambda)
	if opt.Bounded {
		radius = 1 / math.Sqrt(p.Lambda)
	}
	l := &s.lattice
	l.build(s, q, radius, opt.Bits)
	l.place(s.w)
	for range opt.Cycles {
		copy(l.code, l.best)
		l.measure()
		l.cool(opt, start, rng)
	}
	if !opt.Polish {
		return s.discrete(l, q)
	}
	return s.polish(l, q, rng)
}

// cool runs one cooling and a final descent.
func (l *lattice) cool(opt AnnealOptions, scale float64, rng *rand.Rand) {
	t := opt.Hot * scale
	factor := 1.
	if opt.Sweeps > 1 {
		factor = math.Pow(opt.Cold/opt.Hot, 1/float64(opt.Sweeps-1))
	}
	for range opt.Sweeps {
		for range l.used {
			c := l.used[rng.IntN(len(l.used))]
			if l.try(int(c), l.code[c]^1<<rng.IntN(l.bits), t, rng) && l.j < l.bestJ && len(l.used) <= few {
				l.mark()
			}
		}
		if l.j < l.bestJ {
			l.mark()
		}
		t *= factor
	}
	copy(l.code, l.best)
	l.measure()
	l.settle()
	l.mark()
}

// settle moves single weights, by one bit or one step, as long as that lowers J and for at most so many rounds.
func (l *lattice) settle() {
	const rounds = 20
	top := int32(1)<<l.bits - 1
	for range rounds {
		moved := false
		for _, c := range l.used {
			for b := range l.bits {
				moved = l.fall(int(c), l.code[c]^1<<b) || moved
			}
			moved = l.fall(int(c), min(top, l.code[c]+1)) || moved
			moved = l.fall(int(c), max(0, l.code[c]-1)) || moved
		}
		if !moved {
			return
		}
	}
}

// fall takes a code if it lowers J by more than rounding.
func (l *lattice) fall(c int, code int32) bool {
	before := l.j
	return code != l.code[c] && l.try(c, code, 0, nil) && l.j < before-1e-15
}

// discrete is the best point of the lattice as a state.
func (s *Scratch) discrete(l *lattice, q float64) State {
	copy(l.code, l.best)
	for c := range s.w {
		s.w[c] = 0
	}
	for _, c := range l.used {
		s.w[c] = l.weight(l.code[c])
	}
	clear(s.alpha)
	s.moved()
	j := s.measure(q)
	for i, m := range s.margin {
		s.keep[i] = m > q
	}
	return s.state(q, j, s.collapsed(), Limit)
}

// polish takes the flags of the best point of the lattice, solves for continuous weights with them held, from whatever
// α the run came with, and descends. It ends at the start if that is better.
func (s *Scratch) polish(l *lattice, q float64, rng *rand.Rand) State {
	const held, rounds, tolerance = 5, 20, 1e-2
	copy(l.code, l.best)
	l.measure()
	start := s.best.j
	copy(s.margin, l.margin)
	s.marginsAt = -1
	s.renew(q)
	s.ascendFrom(q, held*s.hold, tolerance, rng)
	status := s.cycleOut(Stage{Q: q, Tolerance: tolerance}, rounds*s.hold, rng)
	if s.best.j >= start {
		status = NoProgress
	}
	return s.end(q, status)
}
