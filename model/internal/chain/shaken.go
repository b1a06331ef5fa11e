package chain

import (
	"fmt"
	"math"
	"math/rand/v2"
)

// Shaken searches over the flags: from the state, as often as hops, it draws every flag anew as if the row's margin
// were blurred by logistic noise, solves for the weights with those flags held, descends, and goes on from the best
// point so far. The blur goes round 3, 1, 0.3 and 0.1 units of the margin: at first most rows may change sides, at last
// those near q. It anneals the latent variables of the variational form, as Annealed does the weights; from's Alpha and
// Keep are by the rows of p. Status is NoProgress if it ends where it began. Cost O(hops·epochs·rows·(Dense+Trees)).
func Shaken(p *Problem, q float64, from *State, hops int, rng *rand.Rand, s *Scratch) State {
	const rounds, last, tolerance, fine = 6, 20, 1e-2, 1e-3
	if len(from.Alpha) != len(p.Rows) || len(from.Keep) != len(p.Rows) {
		panic(fmt.Sprintf("chain: state of %d rows for %d", len(from.Alpha), len(p.Rows)))
	}
	blurs := [...]float64{3, 1, .3, .1}
	s.load(p, rng)
	s.restore(from)
	start := s.measure(q)
	s.remember(start)
	for hop := range hops {
		s.measure(q)
		s.blur(blurs[hop%len(blurs)], rng)
		s.renew(q)
		s.ascendFrom(q, 2*s.hold, tolerance, rng)
		s.cycle(Stage{Q: q, Tolerance: tolerance}, rounds*s.hold, rng)
	}
	s.measure(q)
	status := s.cycleOut(Stage{Q: q, Tolerance: fine}, last*s.hold, rng)
	if s.best.j >= start {
		status = NoProgress
	}
	return s.end(q, status)
}

// blur adds logistic noise of so many units to all measured margins, which are then no longer those of w.
func (s *Scratch) blur(units float64, rng *rand.Rand) {
	s.marginsAt = -1
	for i := range s.margin {
		u := rng.Float64()
		for u == 0 {
			u = rng.Float64()
		}
		s.margin[i] += units * math.Log(u/(1-u))
	}
}
