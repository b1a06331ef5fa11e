package noise

import "math"

// shape says which parts of a model are free.
type shape struct {
	flips    flips
	entries  []int // sparse: the entries i·k+j that have a rate of their own
	boundary bool
	source   bool
}

// flips is the form of the flip matrix.
type flips uint8

const (
	none   flips = iota // the identity
	fixed               // one rate, given
	paired              // one rate for each of two classes, given
	single              // one rate
	sparse              // chosen entries of their own over one background rate
	free                // every entry of its own
)

// Steps and tolerance of the EM.
const (
	coldSteps = 60
	tolerance = 1e-6 // change of the log-likelihood a row
	minRate   = 1e-6 // of a flip matrix entry, so that no observation is impossible
)

// em is one expectation–maximisation under way.
type em struct {
	d      *Data
	p      *Params
	s      shape
	weight []float64 // of each row; nil for ones
	r      *row
	nt     *newton
	c      *counts
	q, gap []float64 // of each row, with boundary flips: their posterior share and the gap between the two top logits
}

// fit runs EM on p in place, for so many steps at most, and returns the log-likelihood, the weak priors included.
// weight (n, or nil for ones) weighs rows.
func fit(d *Data, p *Params, s shape, steps int, weight []float64) float64 {
	e := &em{d: d, p: p, s: s, weight: weight, r: newRow(d.Classes), nt: newNewton(d, p), c: newCounts(d)}
	if s.boundary {
		e.q, e.gap = make([]float64, d.Rows()), make([]float64, d.Rows())
	}
	last := math.Inf(-1)
	var before *Params
	for step := range steps {
		ll := e.expect()
		if ll < last && before != nil && step < steps-1 {
			p.halfway(before) // the Newton step went too far
			last = math.Inf(-1)
			continue
		}
		done := ll-last < tolerance*float64(d.Rows())
		last = ll
		if done || step == steps-1 {
			break
		}
		before = p.clone()
		e.maximise()
	}
	return last
}

// expect is the E step: it gathers what maximise needs and returns the log-likelihood at the present parameters.
func (e *em) expect() float64 {
	e.nt.reset()
	e.c.reset()
	ll := 0.0
	for i := range e.d.Rows() {
		w := 1.0
		if e.weight != nil {
			w = e.weight[i]
		}
		o, src := int(e.d.Observed[i]), e.d.source(i)
		e.p.logits(e.r, e.d.Members, i)
		ll += w * e.p.infer(e.r, o, src)
		e.nt.add(e.p, e.r, e.d.Members, i, w)
		e.p.count(e.c, e.r, o, src, w)
		if e.s.boundary {
			e.q[i], e.gap[i] = e.r.q, e.r.gap
		}
	}
	return ll + e.p.prior(e.nt.size)
}

// maximise is the M step; of the logits' parameters it is one Newton step.
func (e *em) maximise() {
	e.p.updateFlips(e.c, e.s, e.d.Classes)
	if e.s.source {
		e.p.updateSources(e.c)
	}
	if e.s.boundary {
		e.p.updateBoundary(e.q, e.gap, e.weight)
	}
	e.nt.step(e.p)
}

// halfway moves the logits' parameters half of the way back.
func (p *Params) halfway(to *Params) {
	for m := range p.A {
		p.A[m] = (p.A[m] + to.A[m]) / 2
	}
	for j := range p.B {
		p.B[j] = (p.B[j] + to.B[j]) / 2
	}
	for j := range p.Slopes {
		p.Slopes[j].Mu = (p.Slopes[j].Mu + to.Slopes[j].Mu) / 2
	}
}

// prior is the log-density, up to a constant, of the weak normal prior that keeps separable tables finite.
func (p *Params) prior(size []float64) float64 {
	v := 0.0
	mean := p.meanShare(size)
	for m, a := range p.A {
		u := a*size[m] - mean
		v -= 0.5*ridgeA*a*a + 0.5*likeness*u*u
	}
	for _, b := range p.B {
		v -= 0.5 * ridgeB * b * b
	}
	for _, s := range p.Slopes {
		v -= 0.5 * ridgeMu * s.Mu * s.Mu
	}
	return v
}
