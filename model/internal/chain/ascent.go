package chain

import (
	"math"
	"math/rand/v2"

	"labelweir/model/internal/loss"
)

const (
	// slack is how far beyond 1 the margin of a row with α = 0 may be for an epoch to visit it all the same: rows
	// farther out would have to move that much before the next renewal to matter.
	slack = 0.1

	// blockRows is the run of rows an epoch walks in order before it jumps to another random place.
	blockRows = 16
)

// measure brings all margins up to date with w and returns J_q(w).
func (s *Scratch) measure(q float64) float64 {
	if s.marginsAt != s.at {
		for i := range s.margin {
			s.margin[i] = s.y[i] * s.dot(i)
		}
		s.marginsAt = s.at
	}
	var sum float64
	var kept, all [2]float64
	for i, m := range s.margin {
		o, class := s.omega[i], 0
		if s.y[i] > 0 {
			class = 1
		}
		sum += o * loss.Value(q, m)
		all[class] += o
		if loss.Keep(q, m) {
			kept[class] += o
		}
	}
	s.kept = [2]float64{kept[0] / all[0], kept[1] / all[1]}
	return sum + s.lambda*squares(s.w)
}

func squares(w []float64) float64 {
	var sum float64
	for _, v := range w {
		sum += v * v
	}
	return sum
}

// renew sets every flag from the margins of the last measure and only then takes the α of the dropped rows out of w:
// doing both in one pass lets each removal lower its neighbours' margins and cascades into dropping a whole class.
// It returns how many flags changed.
func (s *Scratch) renew(q float64) (changed int) {
	for i, m := range s.margin {
		if keep := loss.Keep(q, m); keep != s.keep[i] {
			s.keep[i] = keep
			changed++
		}
	}
	for i, keep := range s.keep {
		if a := s.alpha[i]; !keep && a != 0 {
			s.alpha[i] = 0
			s.add(i, -a*s.y[i])
			s.moved()
		}
	}
	return changed
}

// enlist lists the rows an epoch has to visit: kept, and either pulling or near enough to begin to.
func (s *Scratch) enlist() {
	s.active = s.active[:0]
	for i, keep := range s.keep {
		if keep && (s.alpha[i] > 0 || s.margin[i] < 1+slack) {
			s.active = append(s.active, int32(i))
		}
	}
	s.blocks = s.blocks[:0]
	for b := 0; b < len(s.active); b += blockRows {
		s.blocks = append(s.blocks, int32(b))
	}
}

// epoch makes one exact dual step along every listed row and returns the largest projected gradient it met.
func (s *Scratch) epoch(rng *rand.Rand) float64 {
	for k := len(s.blocks) - 1; k > 0; k-- {
		r := rng.IntN(k + 1)
		s.blocks[k], s.blocks[r] = s.blocks[r], s.blocks[k]
	}
	var worst float64
	for _, b := range s.blocks {
		for _, i32 := range s.active[b:min(int(b)+blockRows, len(s.active))] {
			i := int(i32)
			a, y := s.alpha[i], s.y[i]
			g := y*s.dot(i) - 1 + a*s.ratio[i]
			if a == 0 && g >= 0 {
				continue
			}
			worst = max(worst, math.Abs(g))
			next := max(0, a-g/s.denom[i])
			s.alpha[i] = next
			s.add(i, (next-a)*y)
		}
	}
	s.moved()
	s.epochs++
	return worst
}
