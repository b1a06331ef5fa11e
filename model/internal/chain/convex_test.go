package chain

import (
	"math"
	"testing"

	"gonum.org/v1/gonum/optimize"
)

// convex minimises Σ ωφ(m) + λ‖w‖² by L-BFGS; phi gives φ and its slope.
func convex(t *testing.T, p *Problem, phi func(m float64) (value, slope float64)) []float64 {
	t.Helper()
	f := optimize.Problem{
		Func: func(w []float64) float64 {
			var j float64
			for k, m := range margins(p, w) {
				v, _ := phi(m)
				j += p.Omega[k] * v
			}
			return j + p.Lambda*squares(w)
		},
		Grad: func(g, w []float64) {
			for c, v := range w {
				g[c] = 2 * p.Lambda * v
			}
			for k, m := range margins(p, w) {
				_, s := phi(m)
				s *= p.Omega[k] * float64(p.Y[k])
				r := int(p.Rows[k])
				for c, v := range p.X[r*p.Dense : (r+1)*p.Dense] {
					g[c] += s * float64(v)
				}
			}
		},
	}
	set := &optimize.Settings{GradientThreshold: 1e-9, MajorIterations: 2000}
	r, err := optimize.Minimize(f, make([]float64, p.Dense), set, &optimize.LBFGS{})
	if err != nil && r == nil {
		t.Fatal(err)
	}
	return r.X
}

func logistic(m float64) (value, slope float64) {
	return math.Log1p(math.Exp(-math.Abs(m))) + math.Max(0, -m), -1 / (1 + math.Exp(m))
}

func squaredHinge(m float64) (value, slope float64) {
	h := math.Max(0, 1-m)
	return h * h, -2 * h
}
