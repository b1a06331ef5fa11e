package noise

// updateFlips sets the flip matrix from expected counts.
func (p *Params) updateFlips(c *counts, s shape, k int) {
	switch s.flips {
	case none, fixed, paired:
		return
	case single:
		off, n := c.off(k)
		copy(p.Flip, uniform(k, max(minRate, (p.scale(c)*off+0.5)/(n+1))))
	case free:
		off, n := c.off(k)
		background := (off + 0.5) / (n + 1) / float64(k-1)
		scale := p.scale(c)
		for i := range k {
			total := c.of(i, k)
			p.setRow(i, func(j int) float64 {
				return scale * (c.pair[i*k+j] + background) / (total + 2)
			})
		}
	case sparse:
		p.updateSparse(c, s.entries, k)
	}
}

// updateSparse gives the chosen entries their own rates and all others one rate an entry.
func (p *Params) updateSparse(c *counts, entries []int, k int) {
	chosen := make([]bool, k*k)
	for _, e := range entries {
		chosen[e] = true
	}
	scale := p.scale(c)
	x, room := 0.5/float64(k-1), 1.0
	for i := range k {
		n := c.of(i, k)
		for j := range k {
			if i != j && !chosen[i*k+j] {
				x += c.pair[i*k+j]
				room += n
			}
		}
	}
	background := scale * x / room
	for i := range k {
		total := c.of(i, k)
		p.setRow(i, func(j int) float64 {
			if chosen[i*k+j] {
				return scale * (c.pair[i*k+j] + background) / (total + 2)
			}
			return background
		})
	}
}

// setRow sets row i of the flip matrix from its off-diagonal rates, at least minRate each and maxFlip together.
func (p *Params) setRow(i int, rate func(j int) float64) {
	k := len(p.B)
	row := p.Flip[i*k : (i+1)*k]
	off := 0.0
	for j := range row {
		if j != i {
			row[j] = max(minRate, rate(j))
			off += row[j]
		}
	}
	if off > maxFlip {
		for j := range row {
			row[j] *= maxFlip / off
		}
		off = maxFlip
	}
	row[i] = 1 - off
}

// scale is what expected flips are multiplied by so that Flip keeps meaning "at factor 1": the inverse of the mean
// source factor.
func (p *Params) scale(c *counts) float64 {
	if p.Rho == nil {
		return 1
	}
	have, want := 0.0, 0.0
	for s, e := range c.expect {
		have += e * p.Rho[s]
		want += e
	}
	if have <= 0 {
		return 1
	}
	return want / have
}

// updateSources sets each source's factor: its expected flips over those predicted with every factor 1, drawn to 1.
func (p *Params) updateSources(c *counts) {
	for s := range p.Rho {
		p.Rho[s] = (c.source[s] + 1) / (c.expect[s] + 1)
	}
}
