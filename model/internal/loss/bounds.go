package loss

import "math"

// LowestQ is the open lower end of the interval of useful q for a share rho of wrong labels: 1 − 1/√ρ < q ≤ 0. Below
// it, dropping exactly the wrong labels would cost ρ(1−q)² ≥ 1, no less than the zero weights, whose objective is 1
// (arXiv:1205.1148). It is −Inf for rho = 0 and panics outside [0, 1].
func LowestQ(rho float64) float64 {
	if !(rho >= 0 && rho <= 1) {
		panic("loss: share of wrong labels outside [0, 1]")
	}
	return 1 - 1/math.Sqrt(rho)
}

// Radius is 1/√λ, which bounds every weight of a minimum: its objective is at most that of zero weights, which is 1, so
// λ‖w‖² ≤ 1.
func Radius(lambda float64) float64 { return 1 / math.Sqrt(lambda) }

// CollapseCost is the objective of dropping one whole class and calling every row the other, but for the small price of
// the weights that say so: (1−q)² for the share of the weight that the class has, ½(1−q)² when classes are balanced.
// Where the best solution that tells the classes apart costs more than this, the objective at that q prefers not to:
// such a q is too near 0 for how hard the classes are to tell apart.
func CollapseCost(q, share float64) float64 { return share * Ceiling(q) }
