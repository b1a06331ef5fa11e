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

// counts are the sums of one E step.
type counts struct {
	pair   []float64 // k·k: expected (z, observed)
	source []float64 // expected flips by source
	expect []float64 // the same, predicted with every factor 1
	rows   []float64 // rows by source
}

// fit runs EM on p in place and returns the log-likelihood. weight (n, or nil for ones) weighs rows.
func fit(d *Data, p *Params, s shape, steps int, weight []float64) float64 {
	k, n := d.Classes, d.Rows()
	r := newRow(k)
	nt := newNewton(d, p)
	c := counts{pair: make([]float64, k*k), source: make([]float64, d.Sources), expect: make([]float64, d.Sources), rows: make([]float64, d.Sources)}
	var q, gap []float64
	if s.boundary {
		q, gap = make([]float64, n), make([]float64, n)
	}
	last := math.Inf(-1)
	var before *Params
	total := float64(n)
	for step := range steps {
		nt.reset()
		clear(c.pair)
		clear(c.source)
		clear(c.expect)
		clear(c.rows)
		ll := 0.0
		for i := range n {
			w := 1.0
			if weight != nil {
				w = weight[i]
			}
			src := -1
			if d.Source != nil {
				src = int(d.Source[i])
			}
			o := int(d.Observed[i])
			p.logits(r, d.Members, i)
			ll += w * p.infer(r, o, src)
			nt.add(p, r, d.Members, i, w)
			p.count(&c, r, o, src, w)
			if s.boundary {
				q[i], gap[i] = r.q, r.gap
			}
		}
		ll += p.prior(nt.size)
		if ll < last && before != nil && step < steps-1 {
			// The Newton step went too far: go half the way.
			half := math.Inf(-1)
			for m := range p.A {
				p.A[m] = (p.A[m] + before.A[m]) / 2
			}
			for j := range p.B {
				p.B[j] = (p.B[j] + before.B[j]) / 2
			}
			for j := range p.Slopes {
				p.Slopes[j].Mu = (p.Slopes[j].Mu + before.Slopes[j].Mu) / 2
			}
			last = half
			continue
		}
		if ll-last < tolerance*total {
			last = ll
			break
		}
		last = ll
		if step == steps-1 {
			break
		}
		before = p.clone()
		p.updateFlips(&c, s, k)
		if s.source {
			p.updateSources(&c)
		}
		if s.boundary {
			p.updateBoundary(q, gap, weight)
		}
		nt.step(p)
	}
	return last
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
	return v
}

// count adds one row's expected flips.
func (p *Params) count(c *counts, r *row, o, src int, w float64) {
	k := len(p.B)
	g := p.Gamma * r.e
	// Posterior of z, the label after boundary flips: post holds that of y, which differs only in the swapped share.
	off := 0.0
	for z := range k {
		v := r.post[z]
		if g > 0 && (z == r.one || z == r.two) {
			v = r.zShare(p, z, o, src, g)
		}
		c.pair[z*k+o] += w * v
		if z != o {
			off += v
		}
	}
	if src >= 0 {
		c.source[src] += w * off
		c.rows[src] += w
		e := 0.0
		for z := range k {
			e += r.prob[z] * (1 - p.Flip[z*k+z])
		}
		c.expect[src] += w * e
	}
}

// zShare is the posterior of z for one of the two top classes.
func (r *row) zShare(p *Params, z, o, src int, g float64) float64 {
	other := r.one + r.two - z
	factor := 1.0
	if p.Rho != nil && src >= 0 {
		factor = p.Rho[src]
	}
	mine := (r.prob[z]*(1-g) + r.prob[other]*g) * p.flip(z, o, factor)
	theirs := (r.prob[other]*(1-g) + r.prob[z]*g) * p.flip(other, o, factor)
	both := r.post[z] + r.post[other]
	if mine+theirs == 0 {
		return both / 2
	}
	return both * mine / (mine + theirs)
}

func (p *Params) updateFlips(c *counts, s shape, k int) {
	switch s.flips {
	case none, fixed, paired:
		return
	case single:
		off, n := 0.0, 0.0
		for i := range k {
			for j := range k {
				n += c.pair[i*k+j]
				if i != j {
					off += c.pair[i*k+j]
				}
			}
		}
		if p.Rho != nil {
			off = p.scaled(c, off)
		}
		copy(p.Flip, uniform(k, max(minRate, (off+0.5)/(n+1))))
	case free:
		rate := p.meanRate(c, k)
		for i := range k {
			p.freeRow(c, i, rate, nil)
		}
	case sparse:
		p.sparseRows(c, s.entries, k)
	}
}

// scaled divides expected flips by the mean source factor, so that Flip keeps meaning "at factor 1".
func (p *Params) scaled(c *counts, off float64) float64 {
	have, want := 0.0, 0.0
	for s, e := range c.expect {
		have += e * p.Rho[s]
		want += e
	}
	if have <= 0 {
		return off
	}
	return off * want / have
}

func (p *Params) meanRate(c *counts, k int) float64 {
	off, n := 0.0, 0.0
	for i := range k {
		for j := range k {
			n += c.pair[i*k+j]
			if i != j {
				off += c.pair[i*k+j]
			}
		}
	}
	return (off + 0.5) / (n + 1)
}

// freeRow sets row i from its counts, drawn a little towards the mean rate.
func (p *Params) freeRow(c *counts, i int, rate float64, only []bool) {
	k := len(p.B)
	n := 0.0
	for j := range k {
		n += c.pair[i*k+j]
	}
	scale := 1.0
	if p.Rho != nil {
		scale = p.scaled(c, 1)
	}
	off := 0.0
	for j := range k {
		if j == i {
			continue
		}
		v := max(minRate, scale*(c.pair[i*k+j]+rate/float64(k-1))/(n+2))
		p.Flip[i*k+j] = v
		off += v
	}
	if off > maxFlip {
		for j := range k {
			if j != i {
				p.Flip[i*k+j] *= maxFlip / off
			}
		}
		off = maxFlip
	}
	p.Flip[i*k+i] = 1 - off
}

// sparseRows gives the chosen entries their own rates and all others one rate an entry.
func (p *Params) sparseRows(c *counts, entries []int, k int) {
	chosen := make([]bool, k*k)
	for _, e := range entries {
		chosen[e] = true
	}
	scale := 1.0
	if p.Rho != nil {
		scale = p.scaled(c, 1)
	}
	x, room := 0.5/float64(k-1), 1.0
	for i := range k {
		n := 0.0
		for j := range k {
			n += c.pair[i*k+j]
		}
		for j := range k {
			if i != j && !chosen[i*k+j] {
				x += c.pair[i*k+j]
				room += n
			}
		}
	}
	back := max(minRate, scale*x/room)
	for i := range k {
		n, off := 0.0, 0.0
		for j := range k {
			n += c.pair[i*k+j]
		}
		for j := range k {
			if i == j {
				continue
			}
			v := back
			if chosen[i*k+j] {
				v = max(minRate, scale*(c.pair[i*k+j]+back)/(n+2))
			}
			p.Flip[i*k+j] = v
			off += v
		}
		if off > maxFlip {
			for j := range k {
				if j != i {
					p.Flip[i*k+j] *= maxFlip / off
				}
			}
			off = maxFlip
		}
		p.Flip[i*k+i] = 1 - off
	}
}

func (p *Params) updateSources(c *counts) {
	if p.Rho == nil {
		return
	}
	for s := range p.Rho {
		p.Rho[s] = (c.source[s] + 1) / (c.expect[s] + 1)
	}
}

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
