package noise

import "math"

// updateBoundary sets γ in two passes and then tries τ a little smaller and larger.
func (p *Params) updateBoundary(q, gap, weight []float64) {
	for range 2 {
		num, den := 1.0, 4.0
		for i, m := range gap {
			w := 1.0
			if weight != nil {
				w = weight[i]
			}
			e := 0.5 * math.Exp(-m/p.Tau)
			num += w * q[i]
			den += w * e * (1 - q[i]) / (1 - p.Gamma*e)
		}
		p.Gamma = min(max(num/den, 1e-4), 0.98)
	}
	best, bestTau := math.Inf(-1), p.Tau
	for _, f := range [...]float64{1, 0.85, 1.18} {
		tau := min(max(p.Tau*f, 0.7), 8)
		v := 0.0
		for i, m := range gap {
			w := 1.0
			if weight != nil {
				w = weight[i]
			}
			g := p.Gamma * 0.5 * math.Exp(-m/tau)
			v += w * (q[i]*math.Log(g) + (1-q[i])*math.Log1p(-g))
		}
		if v > best {
			best, bestTau = v, tau
		}
	}
	p.Tau = bestTau
}
