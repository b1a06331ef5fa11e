package chain

import (
	"math"
	"math/rand/v2"
)

// descend alternates renewals of the flags with epochs at one q and goes back to the best point it met, its own start
// included; J along a path whose q rises therefore never rises.
func (s *Scratch) descend(st Stage, rng *rand.Rand) (status Status) {
	s.remember(s.measure(st.Q))
	return s.cycle(st, st.Rounds*s.hold, rng)
}

// cycle is descend, for so many epochs, from a point already measured and with a best point already remembered.
func (s *Scratch) cycle(st Stage, epochs int, rng *rand.Rand) (status Status) {
	const patience = 6 // J may rise for some rounds after many rows are dropped, before it falls below where it was
	gain := st.Tolerance * 1e-3
	still := 0 // rounds in a row that gained next to nothing: a few flags may flicker for ever
	for e := 0; e < epochs && status != Converged; {
		changed := s.renew(st.Q)
		worst, used := s.ascend(min(s.hold, epochs-e), st.Tolerance, rng)
		e += used
		before := s.best.j
		s.consider(s.measure(st.Q))
		if still++; s.best.j < before*(1-gain) {
			still = 0
		}
		if still == patience || changed == 0 && worst <= st.Tolerance && s.steady(st.Q) {
			status = Converged
		}
	}
	s.stray = s.at != s.best.at
	s.recall()
	return status
}

// settle goes down from the best point where that is not the last one: a run may pass a point lower than the bottom it
// comes to rest in. With flags as the best point's margins ask and the weights solved out each time, J can only fall.
func (s *Scratch) settle(st Stage, rng *rand.Rand) (status Status) {
	const rounds, epochs = 50, 20 // epochs in units of hold
	for range rounds {
		before := s.best.j
		s.measure(st.Q)
		changed := s.renew(st.Q)
		worst, _ := s.ascendFrom(st.Q, epochs*s.hold, st.Tolerance, rng)
		if changed == 0 && worst <= st.Tolerance {
			s.recall()
			return Converged
		}
		if s.best.j >= before {
			break // less than the weights were solved out to
		}
	}
	s.recall()
	return Limit
}

// descendOut is descend and, if it ends elsewhere than at its last point, settle.
func (s *Scratch) descendOut(st Stage, rng *rand.Rand) (status Status) {
	s.remember(s.measure(st.Q))
	return s.cycleOut(st, st.Rounds*s.hold, rng)
}

// cycleOut is cycle and, if it ends elsewhere than at its last point, settle.
func (s *Scratch) cycleOut(st Stage, epochs int, rng *rand.Rand) (status Status) {
	status = s.cycle(st, epochs, rng)
	if s.stray {
		status = s.settle(st, rng)
	}
	return status
}

// ascend makes up to n epochs with the flags held, fewer when no projected gradient is above tol any more.
func (s *Scratch) ascend(n int, tol float64, rng *rand.Rand) (worst float64, used int) {
	s.enlist()
	for used < n {
		worst = s.epoch(rng)
		used++
		if worst <= tol {
			break
		}
	}
	return worst, used
}

// ascendFrom is ascend after flags were set by other margins than those at the present w, or rows dropped: margins are
// measured before, so that every row that ought to is visited, and after, so that the point is considered.
func (s *Scratch) ascendFrom(q float64, n int, tol float64, rng *rand.Rand) (worst float64, used int) {
	s.measure(q)
	worst, used = s.ascend(n, tol, rng)
	s.consider(s.measure(q))
	return worst, used
}

// steady tells whether the margins of the last measure ask for the flags as they are.
func (s *Scratch) steady(q float64) bool {
	for i, m := range s.margin {
		if s.keep[i] != (m > q) {
			return false
		}
	}
	return true
}

// Descend is plain block coordinate descent at one q: the convex problem solved out, then flags and weights by turns,
// the weights solved out each time, until the flags stand still. It is what the other runs are measured against.
func Descend(p *Problem, q float64, rng *rand.Rand, s *Scratch) State {
	const epochs, rounds, tolerance = 300, 200, 1e-3
	s.load(p, rng)
	s.measure(math.Inf(-1))
	s.ascend(epochs, tolerance, rng)
	s.remember(s.measure(q))
	status := Limit
	for range rounds {
		if s.renew(q) == 0 {
			status = Converged
			break
		}
		s.ascend(epochs, tolerance, rng)
		s.consider(s.measure(q))
	}
	return s.end(q, status)
}
