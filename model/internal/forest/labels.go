package forest

// relabel draws this tree's labels.
func (g *grower) relabel() {
	if g.rows.Chance == nil {
		return
	}
	for i := range g.labels {
		u := g.rng.Float64()
		p := g.rows.Chance[i*g.k : (i+1)*g.k]
		c := 0
		for c < g.k-1 && u >= p[c] {
			u -= p[c]
			c++
		}
		g.labels[i] = int32(c)
	}
}

// balance gives every class the same total weight.
func (g *grower) balance() {
	clear(g.weight)
	for _, l := range g.labels {
		g.weight[l]++
	}
	for c, n := range g.weight {
		if n > 0 {
			g.weight[c] = float64(len(g.labels)) / n
		}
	}
}
