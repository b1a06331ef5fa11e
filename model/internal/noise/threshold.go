package noise

import (
	"math"
	"math/rand/v2"
	"sort"
)

// How the threshold is guarded: z of a one-sided 90 % bound, and the draws of the bootstrap with their EM steps.
const (
	z80        = 1.2815515655446004
	draws      = 12
	drawnSteps = 6
	caution    = 2    // on the expected good rows: what is held back was picked for its high scores
	odd        = 2.0  // good rows expected among those held back, whatever the model says
	unseen     = 6.0  // rows of n that are odd in a way no model here knows of: added to the chance of each to be good
	lowest     = 0.92 // score that may ever be held back: below it the average would be carried by the rows above
	drawnRows  = 6000 // a bootstrap on more rows looks at the first so many
)

// Threshold is the lowest score that may be held back so that the expected share of good labels among all rows scored
// as high stays at or below 1 − precision: the largest prefix of the ranking whose upper bound
// (2·c + 2 + 1.28·√(v + v_b))/k does, c = Σ(1−p + 6/n), v = Σp(1−p) (Bayesian false discovery rate: Newton et al. 2004; Storey
// 2003). v_b is the variance of c under refits to rows with random exponential weights (Rubin 1981). The result is
// above 1 when no row may be held back. scores[i] is the mislabel score of row i.
func Threshold(d *Data, l *Layer, scores []float64, precision float64, rng *rand.Rand) float64 {
	n := len(scores)
	order := make([]int, n)
	for i := range order {
		order[i] = i
	}
	sort.SliceStable(order, func(a, b int) bool { return scores[order[a]] > scores[order[b]] })
	drawn := bootstrap(d, l, rng)
	sums := make([]float64, len(drawn))
	c, v, best := 0.0, 0.0, 2.0
	for k, i := range order {
		p := scores[i]
		c += 1 - p + unseen/float64(n)
		v += p * (1 - p)
		for b := range drawn {
			sums[b] += 1 - drawn[b].score(d, i)
		}
		if k+1 < n && scores[order[k+1]] == p {
			continue
		}
		if p < lowest {
			break
		}
		vb := 0.0
		if len(sums) > 0 {
			q := append([]float64(nil), sums...)
			sort.Float64s(q)
			if up := q[int(0.9*float64(len(q)))] - c; up > 0 {
				vb = up / z80 * up / z80
			}
		}
		if (caution*c+odd+z80*math.Sqrt(v+vb))/float64(k+1) <= 1-precision {
			best = p
		}
	}
	return best
}

// replica is the leading model refitted to randomly weighted rows.
type replica struct {
	p *Params
	r *row
}

func (b *replica) score(d *Data, i int) float64 {
	b.p.logits(b.r, d.Members, i)
	b.p.infer(b.r, int(d.Observed[i]), d.source(i))
	return 1 - b.r.right
}

func bootstrap(d *Data, l *Layer, rng *rand.Rand) []*replica {
	n := min(d.Rows(), drawnRows)
	part := *d
	part.Observed = d.Observed[:n]
	if d.Source != nil {
		part.Source = d.Source[:n]
	}
	w := make([]float64, n)
	out := make([]*replica, draws)
	for b := range out {
		for i := range w {
			w[i] = rng.ExpFloat64()
		}
		m := l.pick(rng.Float64())
		p := m.P.clone()
		s := m.shape
		switch s.flips {
		case fixed:
			s.flips = single
		case paired:
			s.flips = free
		}
		fit(&part, p, s, drawnSteps, w)
		out[b] = &replica{p: p, r: newRow(d.Classes)}
	}
	return out
}

// pick is the model at u of the cumulated weights, so that replicas are spread over the models as the average is.
func (l *Layer) pick(u float64) *Model {
	for i := range l.Models {
		if u -= l.Models[i].Weight; u <= 0 {
			return &l.Models[i]
		}
	}
	return &l.Models[0]
}
