package chain

import (
	"math"
	"math/rand/v2"
	"slices"
)

// Stage is one step of graduation: up to Rounds renewals of the flags at Q, each followed by as many epochs as w needs
// to follow (2 where rows are many, up to 8 where they are few), ended early when the flags stand still and no
// projected gradient, in units of the margin, is above Tolerance, or when six rounds in a row lower J by less than a
// thousandth of Tolerance, as a share of J.
type Stage struct {
	Q         float64
	Rounds    int
	Tolerance float64
}

// Path is the default way down for snapshots at the values of want: from the convex squared hinge (q = −Inf) through
// −2, −1.4, −1, −0.75, −0.5, −0.3, −0.15 and 0, with want's own values among them, ending at the largest of them.
func Path(want []float64) []Stage {
	const loose, fine = 3e-2, 1e-2
	end := slices.Max(want)
	path := []Stage{{math.Inf(-1), 4, loose}}
	qs := []float64{-2, -1.4, -1, -.75, -.5, -.3, -.15, 0}
	for _, q := range want {
		if !slices.Contains(qs, q) && !math.IsInf(q, -1) {
			qs = append(qs, q)
		}
	}
	slices.Sort(qs)
	for _, q := range qs {
		if q > end {
			break
		}
		st := Stage{q, 2, loose}
		if slices.Contains(want, q) {
			st = Stage{q, 20, fine}
		}
		path = append(path, st)
	}
	if slices.Contains(want, math.Inf(-1)) {
		path[0].Rounds, path[0].Tolerance = 20, fine
	}
	return path
}

// Graduated runs down path from the convex start and returns the state at each value of want, in want's order: one
// path serves every q (graduated non-convexity, Blake & Zisserman 1987). path is Path(want) when nil, else must hold
// every value of want, and its Q must not fall. Cost O(epochs·rows·(Dense+Trees)).
func Graduated(p *Problem, path []Stage, want []float64, rng *rand.Rand, s *Scratch) []State {
	if path == nil {
		path = Path(want)
	}
	s.load(p, rng)
	out := make([]State, len(want))
	done := 0
	for _, st := range path {
		if !slices.Contains(want, st.Q) {
			s.descend(st, rng)
			continue
		}
		status := s.descendOut(st, rng)
		for k, q := range want {
			if q == st.Q {
				out[k] = s.end(q, status)
				done++
			}
		}
	}
	if done != len(want) {
		panic("chain: a wanted q is not on the path, or is on it twice")
	}
	return out
}
