package chain

import (
	"math"
	"slices"
)

// Status says how a run ended.
type Status uint8

// The ends of a run.
const (
	Limit      Status = iota // the epochs were used up
	Converged                // flags and weights stand still to the stage's tolerance, or J does
	NoProgress               // a continuation that did not lower J: the state is the start of it
)

// String gives the status's name.
func (s Status) String() string { return [...]string{"limit", "converged", "no progress"}[s] }

// State is where a run ended. Alpha and Keep are by entry of the problem's Rows; a dropped row has Alpha 0, and
// W = Σ αᵢyᵢxᵢ up to rounding unless the run was annealed without polish. It owns its slices.
type State struct {
	W      []float64 // Columns() weights: dense, then leaves
	Alpha  []float64
	Keep   []bool
	Q      float64
	J      float64
	Status Status

	// Collapsed says that the run dropped nearly all of one class: at this q the objective prefers that to telling the
	// classes apart. Runs avoid such points even at a lower J and end at one only if they met no other.
	Collapsed bool

	Epochs int // passes over the kept rows up to here
}

// Clone is a copy that shares nothing with s.
func (s *State) Clone() State {
	c := *s
	c.W, c.Alpha, c.Keep = slices.Clone(s.W), slices.Clone(s.Alpha), slices.Clone(s.Keep)
	return c
}

// Finite tells whether the objective is a number; a run on features that are not finite has none.
func (s *State) Finite() bool { return !math.IsNaN(s.J) && !math.IsInf(s.J, 0) }
