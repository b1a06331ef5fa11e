package chain

import (
	"fmt"
	"math/rand/v2"

	"labelweir/model/internal/loss"
)

// heldEpochs is how long a warm run holds the flags it came with. Rows that left took their α out of w, so margins are
// off at first; flags renewed on them fall towards the solution that drops everything.
const heldEpochs = 4

// Carry brings a state to another problem of the same features: index gives, for each entry of p's rows, the entry of
// the state's old problem, or −1 for a row that is new. A known row keeps its α and flag, except that one whose label
// changed starts as new; a new row has α = 0 and the flag its margin under the carried weights asks for. changed, which
// may be nil, marks the rows whose label is another one now. W is rebuilt, J computed.
func Carry(p *Problem, q float64, from *State, index []int32, changed []bool, s *Scratch) State {
	n := len(p.Rows)
	if len(index) != n || (changed != nil && len(changed) != n) {
		panic(fmt.Sprintf("chain: index of %d entries for %d rows", len(index), n))
	}
	st := State{Alpha: make([]float64, n), Keep: make([]bool, n), Q: q}
	known := func(k int) bool { return index[k] >= 0 && (changed == nil || !changed[k]) }
	for k := range n {
		if known(k) {
			st.Alpha[k], st.Keep[k] = from.Alpha[index[k]], from.Keep[index[k]]
		}
	}
	s.load(p, nil)
	s.restore(&st)
	st.J = s.measure(q)
	st.Collapsed = s.collapsed()
	st.W = append([]float64(nil), s.w...)
	for i, k := range s.perm {
		if !known(int(k)) {
			st.Keep[k] = loss.Keep(q, s.margin[i])
		}
	}
	return st
}

// Warm continues from a state whose Alpha and Keep are by the rows of p (see Carry): it holds the flags for four
// epochs, then renews them as the graduated run does, for epochs epochs in all (at least 5). The result is the point of
// the lowest J met, so never above the J of the start; its Status is NoProgress if that is the start itself.
func Warm(p *Problem, q float64, from *State, epochs int, rng *rand.Rand, s *Scratch) State {
	const tolerance = 1e-2
	if len(from.Alpha) != len(p.Rows) || len(from.Keep) != len(p.Rows) {
		panic(fmt.Sprintf("chain: state of %d rows for %d", len(from.Alpha), len(p.Rows)))
	}
	s.load(p, rng)
	s.restore(from)
	start := s.measure(q)
	s.remember(start)
	_, used := s.ascend(heldEpochs, tolerance, rng)
	s.consider(s.measure(q))
	status := s.cycle(Stage{Q: q, Tolerance: tolerance}, max(1, epochs-used), rng)
	if s.best.j >= start {
		status = NoProgress
	}
	return s.end(q, status)
}
