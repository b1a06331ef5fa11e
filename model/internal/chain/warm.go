package chain

import (
	"fmt"
	"math/rand/v2"

	"labelweir/model/internal/loss"
)

// Start is where a warm run begins, by the rows of its problem: α, flags, and which rows take the flag that their margin
// asks for at first; New may be nil. A dropped row's α does not count.
type Start struct {
	Alpha []float64
	Keep  []bool
	New   []bool
}

// Start is the start at s itself, whose slices it shares.
func (s *State) Start() *Start { return &Start{Alpha: s.Alpha, Keep: s.Keep} }

// Carry brings a state to another problem of the same features: index gives, for each entry of the problem's rows, the
// entry of the state's old problem, or −1 for a row that is new. A known row keeps its α and flag, except that one whose
// label changed starts as new. changed, which may be nil, marks the rows whose label is another one now.
func Carry(from *State, index []int32, changed []bool) *Start {
	n := len(index)
	if changed != nil && len(changed) != n {
		panic(fmt.Sprintf("chain: %d labels for %d rows", len(changed), n))
	}
	st := &Start{Alpha: make([]float64, n), Keep: make([]bool, n), New: make([]bool, n)}
	for k, at := range index {
		if st.New[k] = at < 0 || changed != nil && changed[k]; !st.New[k] {
			st.Alpha[k], st.Keep[k] = from.Alpha[at], from.Keep[at]
		}
	}
	return st
}

// Warm continues from a start: it rebuilds the weights and makes so many epochs, at least two; after all but one of them, or four,
// it renews the flags as the graduated run does. Rows that left took their α out of w, so margins are off at first; flags renewed on
// them would fall towards the solution that drops everything. Five epochs do for few rows, three for many. The result is
// the point of the lowest J met, so never above the J of the start; its Status is NoProgress if that is the start itself.
func Warm(p *Problem, q float64, from *Start, epochs int, rng *rand.Rand, s *Scratch) State {
	const tolerance, held = 1e-2, 4
	s.view(p)
	start := s.take(q, from)
	s.remember(start)
	_, used := s.ascend(max(1, min(held, epochs-1)), tolerance, rng)
	s.consider(s.measure(q))
	status := s.cycle(Stage{Q: q, Tolerance: tolerance}, max(1, epochs-used), rng)
	if s.best.j >= start {
		status = NoProgress
	}
	return s.end(q, status)
}

// take takes α and flags from a start, decides the flags of new rows and returns J.
func (s *Scratch) take(q float64, from *Start) float64 {
	s.restore(from)
	j := s.measure(q)
	for i, k := range s.perm {
		if from.New != nil && from.New[k] {
			s.keep[i] = loss.Keep(q, s.margin[i])
		}
	}
	return j
}
