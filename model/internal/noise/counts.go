package noise

// counts are the sums of one E step.
type counts struct {
	pair   []float64 // k·k: expected (z, observed)
	source []float64 // expected flips by source
	expect []float64 // the same, predicted with every factor 1
}

func newCounts(d *Data) *counts {
	k := d.Classes
	return &counts{pair: make([]float64, k*k), source: make([]float64, d.Sources), expect: make([]float64, d.Sources)}
}

func (c *counts) reset() {
	clear(c.pair)
	clear(c.source)
	clear(c.expect)
}

// of is the expected number of rows with z = i.
func (c *counts) of(i, k int) float64 {
	n := 0.0
	for _, v := range c.pair[i*k : (i+1)*k] {
		n += v
	}
	return n
}

// off is the expected number of flips, and of rows.
func (c *counts) off(k int) (off, n float64) {
	for i := range k {
		all := c.of(i, k)
		n += all
		off += all - c.pair[i*k+i]
	}
	return off, n
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
