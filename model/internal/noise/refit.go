package noise

import "math"

// warmSteps bound the EM of a refit.
const warmSteps = 12

// Refit fits the models of an earlier layer anew, each from its own parameters, to rows whose members and sources are
// the same in number and order. Models that had no weight to speak of are not looked at again.
// A nil layer is fitted from nothing.
func Refit(d *Data, last *Layer) (*Layer, *Facts) {
	if last == nil {
		return Fit(d)
	}
	jobs := []job{{last.noiseless(d.Classes), "none", shape{flips: none}, warmSteps}}
	for i := range last.Models {
		m := &last.Models[i]
		if m.shape.flips != none && (m.Weight > 0.02 || i < 2) {
			jobs = append(jobs, job{m.P.clone(), m.Name, m.shape, warmSteps})
		}
	}
	all := runAll(d, jobs)
	l := average(d.Classes, all)
	l.fitSteps(d)
	return l, newFacts(d, l, all)
}

// noiseless is the leading model without flips of any kind.
func (l *Layer) noiseless(k int) *Params {
	p := l.Models[0].P.clone()
	p.Flip, p.Gamma, p.Rho = uniform(k, 0), 0, nil
	return p
}

// Weight is the mean weight of member m over the models.
func (l *Layer) Weight(m int) float64 {
	v := 0.0
	for i := range l.Models {
		v += l.Models[i].Weight * l.Models[i].P.A[m]
	}
	return v
}

// Keep drops all members but the listed ones from every model; the others must have no weight.
func (l *Layer) Keep(members []int) {
	for i := range l.Models {
		p := &l.Models[i].P
		a := make([]float64, len(members))
		for j, m := range members {
			a[j] = p.A[m]
		}
		p.A = a
	}
}

// Spread is how much member m moves the logits: its weight times the root mean square of its scores.
func (l *Layer) Spread(d *Data, m int) float64 {
	s := 0.0
	for _, v := range d.Members[m] {
		s += v * v
	}
	return l.Weight(m) * math.Sqrt(s/float64(max(1, len(d.Members[m]))))
}
