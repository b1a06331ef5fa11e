package chain

import (
	"math"
	"math/rand/v2"
)

// Shaken searches over the flags: as often as hops, it draws every flag anew as if the row's margin were blurred by
// logistic noise, solves for the weights with those flags held, and descends; it goes on from the bottom so found with
// chance min(1, exp(−ΔJ/T)), else from where it stood, and ends at the lowest of all. The blur goes round 3, 1, 0.3 and
// 0.1 units of the margin: at first most rows may change sides, at last those near q; T falls from 0.003 of J to
// nothing. It anneals the latent variables of the variational form, as Annealed does the weights.
//
// from's Alpha and Keep are by the rows of p. The end is never above from; Status is NoProgress if it is from. Cost
// O(hops·epochs·rows·(Dense+Trees)).
func Shaken(p *Problem, q float64, from *State, hops int, rng *rand.Rand, s *Scratch) State {
	const last, fine, hot = 20, 1e-3, 3e-3
	blurs := [...]float64{3, 1, .3, .1}
	s.load(p, rng)
	s.restore(from.Start())
	start := s.measure(q)
	s.note(&s.here, start)
	s.note(&s.top, start)
	for hop := range hops {
		s.hop(q, blurs[hop%len(blurs)], rng)
		t := hot * start * (1 - float64(hop)/float64(hops))
		s.move(t, rng)
	}
	s.jump(&s.top)
	s.remember(s.measure(q))
	status := s.cycleOut(Stage{Q: q, Tolerance: fine}, last*s.hold, rng)
	if s.best.j >= start {
		status = NoProgress
	}
	return s.end(q, status)
}

// hop goes from where the run stands, by blurred flags, to a bottom, and leaves it as the best point.
func (s *Scratch) hop(q, blur float64, rng *rand.Rand) {
	const rounds, tolerance = 6, 1e-2
	s.jump(&s.here)
	s.measure(q)
	s.blur(blur, rng)
	s.renew(q)
	s.measure(q)
	s.ascend(2*s.hold, tolerance, rng)
	s.remember(s.measure(q))
	s.cycle(Stage{Q: q, Tolerance: tolerance}, rounds*s.hold, rng)
}

// move decides at temperature t whether the run stands at the bottom just found, and keeps the lowest.
func (s *Scratch) move(t float64, rng *rand.Rand) {
	if s.best.collapsed && !s.here.collapsed {
		return
	}
	if s.best.j <= s.here.j+t*rng.ExpFloat64() { // chance exp(−ΔJ/t)
		s.here.take(&s.best)
	}
	if s.best.collapsed == s.top.collapsed && s.best.j < s.top.j || !s.best.collapsed && s.top.collapsed {
		s.top.take(&s.best)
	}
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
