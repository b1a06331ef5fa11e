package noise

// Limits of the search for pair slopes.
const (
	maxSlopes     = 2
	minScoreTest  = 3.0 // of g²/2h, the rise in log-likelihood one slope promises
	minSlopeGain  = 1.5 // rise that keeps it
	slopeFitSteps = 20
)

// slopes looks for pairs of classes that overlap in another measure than the rest and adds a slope for each, one after
// the other, to the single-rate fit. It returns nil when no pair earns one.
func slopes(d *Data, one *candidate) *Params {
	if d.Classes < 3 {
		return nil
	}
	p, ll := one.p.clone(), one.ll
	for len(p.Slopes) < maxSlopes {
		c, e := bestPair(d, p)
		if c < 0 {
			break
		}
		try := p.clone()
		try.Slopes = append(try.Slopes, Slope{C: c, D: e})
		got := fit(d, try, shape{flips: single}, slopeFitSteps, nil)
		if got < ll+minSlopeGain {
			break
		}
		p, ll = try, got
	}
	if len(p.Slopes) == 0 {
		return nil
	}
	return p
}

// bestPair is the pair with the largest score test g²/2h for flattening its boundary (g > 0), or −1, −1.
func bestPair(d *Data, p *Params) (int, int) {
	k := d.Classes
	g, h := make([]float64, k*k), make([]float64, k*k)
	r := newRow(k)
	for i := range d.Rows() {
		src := -1
		if d.Source != nil {
			src = int(d.Source[i])
		}
		p.logits(r, d.Members, i)
		p.infer(r, int(d.Observed[i]), src)
		for c := range k {
			for e := c + 1; e < k; e++ {
				t := r.lin[e] - r.lin[c]
				pc, pe := r.prob[c], r.prob[e]
				g[c*k+e] += ((r.post[c] - pc) - (r.post[e] - pe)) * t
				h[c*k+e] += t * t * (pc + pe - (pc-pe)*(pc-pe))
			}
		}
	}
	best, bc, be := minScoreTest, -1, -1
	for c := range k {
		for e := c + 1; e < k; e++ {
			taken := false
			for _, s := range p.Slopes {
				taken = taken || (s.C == c && s.D == e)
			}
			v := g[c*k+e]
			if test := v * v / (2 * (1 + h[c*k+e])); !taken && v > 0 && test > best {
				best, bc, be = test, c, e
			}
		}
	}
	return bc, be
}
