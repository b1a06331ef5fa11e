package noise

import (
	"fmt"
	"math"
	"slices"
)

// candidate is one fitted model with its evidence.
type candidate struct {
	name     string
	p        *Params
	shape    shape
	ll       float64
	evidence float64 // ll − penalty + dominance
	refused  bool    // some class flips more often than not: such a model explains overlap, not noise
}

// start is the common start of every EM.
func start(d *Data) *Params {
	p := &Params{A: make([]float64, len(d.Members)), B: make([]float64, d.Classes), Flip: uniform(d.Classes, 0), Tau: 1.5}
	for m := range p.A {
		p.A[m] = 2 / float64(len(p.A))
	}
	return p
}

// singleRates are the rates at which a single-rate model is fitted; together they integrate the rate out.
var singleRates = [...]float64{0.01, 0.02, 0.04, 0.07, 0.10, 0.14, 0.18, 0.22, 0.26, 0.30, 0.34, 0.38}

// rateSteps of EM lead from one rate to the next.
const rateSteps = 12

// family fits none, single, free and sparse models from p, and returns them in that order.
func family(d *Data, p *Params, prefix string) []*candidate {
	k := d.Classes
	out := []*candidate{run(d, p.clone(), prefix+"none", shape{flips: none}, coldSteps)}
	one := out[0]
	var best *candidate
	for _, rate := range singleRates {
		p := one.p.clone()
		p.Flip = uniform(k, rate)
		one = run(d, p, fmt.Sprintf("%ssingle %.2f", prefix, rate), shape{flips: fixed}, rateSteps)
		if best == nil || one.evidence > best.evidence {
			best = one
		}
		out = append(out, one)
	}
	best = run(d, best.p.clone(), prefix+"single", shape{flips: single}, coldSteps)
	out = append(out, best)
	if k == 2 {
		grid := twoRates(d, out, prefix)
		for _, c := range grid {
			if !c.refused && c.evidence > best.evidence {
				best = c
			}
		}
		out = append(out, grid...)
	}
	all := run(d, best.p.clone(), prefix+"free", shape{flips: free}, coldSteps)
	out = append(out, all)
	if k > 2 {
		if e := chosenEntries(d, best.p, all.p); len(e) > 0 && len(e) < k*(k-1) {
			out = append(out, run(d, best.p.clone(), prefix+"sparse", shape{flips: sparse, entries: e}, coldSteps))
		}
	}
	return out
}

// pairRates are the rates, one for each of two classes, at which models are fitted when there are two classes.
var pairRates = [...]float64{0.001, 0.05, 0.10, 0.20, 0.30, 0.40}

// twoRates integrates the rates of two classes out. Each model starts from the single-rate model, in singles, nearest
// to its mean rate.
func twoRates(d *Data, singles []*candidate, prefix string) []*candidate {
	var jobs []job
	for _, a := range pairRates {
		for _, b := range pairRates {
			if a == b {
				continue
			}
			near := singles[0]
			for _, c := range singles {
				if math.Abs(c.p.Flip[1]-(a+b)/2) < math.Abs(near.p.Flip[1]-(a+b)/2) {
					near = c
				}
			}
			p := near.p.clone()
			copy(p.Flip, []float64{1 - a, a, b, 1 - b})
			jobs = append(jobs, job{p, fmt.Sprintf("%stwo rates %.2f %.2f", prefix, a, b), shape{flips: paired}, rateSteps})
		}
	}
	return runAll(d, jobs)
}

// run fits one model and gives its evidence.
func run(d *Data, p *Params, name string, s shape, steps int) *candidate {
	c := &candidate{name: name, p: p, shape: s}
	c.ll = fit(d, p, s, steps, nil)
	c.evidence = c.ll - c.penalty(d) + sureness(d, p)
	k := d.Classes
	for i := range k {
		if rate := 1 - p.Flip[i*k+i]; rate >= 0.5 {
			c.refused = true
		} else {
			c.evidence += 0.5 * math.Log(1-4*rate*rate)
		}
	}
	return c
}

// penalty is what a model pays for its freedom, in nats: about one a free rate, more where the entries were chosen
// after looking.
func (c *candidate) penalty(d *Data) float64 {
	k := float64(d.Classes)
	v := float64(len(c.p.Slopes))
	switch c.shape.flips {
	case single:
		v++
	case fixed:
		v += 1 + math.Log(float64(len(singleRates))/3)
	case paired:
		v += 2 + math.Log(float64(len(pairRates)*(len(pairRates)-1))/6)
	case free:
		v += k * (k - 1)
	case sparse:
		v += 1 + (2+0.5*math.Log(k*(k-1)))*float64(len(c.shape.entries))
	}
	if c.shape.boundary {
		// Two parameters, each at ½·ln n as in the Bayesian information criterion (Schwarz 1978) plus one: honest
		// overlap looks much like flips near the boundary, so these have to be plain.
		v += 2 + math.Log(float64(d.Rows()))
	}
	if c.shape.source {
		v += c.sourcePenalty(d)
	}
	return v
}

// sourcePenalty is the effective number of source factors, Σ x/(x + 1) − 1 with x the expected flips of a source.
func (c *candidate) sourcePenalty(d *Data) float64 {
	k := d.Classes
	x := make([]float64, d.Sources)
	r := newRow(k)
	for i := range d.Rows() {
		if s := d.Source[i]; s >= 0 {
			c.p.logits(r, d.Members, i)
			for z := range k {
				x[s] += r.prob[z] * (1 - c.p.Flip[z*k+z])
			}
		}
	}
	v := -1.0
	for _, e := range x {
		v += e / (e + 1)
	}
	return max(v, 0)
}

// chosenEntries are the flip matrix entries that the free fit fills far beyond the background rate: those with
// x·ln(x/E) − (x − E) > 3, x the expected count under the free fit, E that under the single rate.
func chosenEntries(d *Data, one, all *Params) []int {
	k := d.Classes
	x, n := make([]float64, k*k), make([]float64, k)
	r := newRow(k)
	for i := range d.Rows() {
		src := -1
		if d.Source != nil {
			src = int(d.Source[i])
		}
		o := int(d.Observed[i])
		all.logits(r, d.Members, i)
		all.infer(r, o, src)
		for y, v := range r.post {
			x[y*k+o] += v
			n[y] += v
		}
	}
	rate := one.Flip[1]
	var out []int
	for i := range k {
		for j := range k {
			e := max(n[i]*rate, 0.1)
			v := x[i*k+j]
			if i != j && v > e && v*math.Log(v/e)-(v-e) > 3 {
				out = append(out, i*k+j)
			}
		}
	}
	return out
}

// extend adds models with boundary flips, source factors, and both to the single model and the better of the others.
func extend(d *Data, all []*candidate) []*candidate {
	var jobs []job
	var bases []*candidate
	var better *candidate
	for _, c := range all {
		switch {
		case c.shape.flips == single:
			bases = append(bases, c)
		case c.shape.flips > single && !c.refused && (better == nil || c.evidence > better.evidence):
			better = c
		}
	}
	if better != nil {
		bases = append(bases, better)
	}
	for _, b := range bases {
		kinds := []shape{{boundary: true}}
		if d.Source != nil && d.Sources > 1 {
			kinds = append(kinds, shape{source: true}, shape{boundary: true, source: true})
		}
		for _, s := range kinds {
			s.flips, s.entries = b.shape.flips, b.shape.entries
			p := b.p.clone()
			name := b.name
			if s.boundary {
				p.Gamma = 0.3
				name += "+boundary"
			}
			if s.source {
				p.Rho = slices.Repeat([]float64{1}, d.Sources)
				name += "+source"
			}
			jobs = append(jobs, job{p, name, s, coldSteps})
		}
	}
	return runAll(d, jobs)
}
