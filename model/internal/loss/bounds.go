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
