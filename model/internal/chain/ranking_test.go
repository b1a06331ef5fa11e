package chain

import "slices"

// margins are y·(w·x) by row.
func margins(p *Problem, w []float64) []float64 {
	m := make([]float64, len(p.Rows))
	for k, r := range p.Rows {
		for c, v := range p.X[int(r)*p.Dense : (int(r)+1)*p.Dense] {
			m[k] += float64(p.Y[k]) * float64(v) * w[c]
		}
	}
	return m
}

// averagePrecision is that of the ranking by lowest margin; rows of equal margin share their precision.
func averagePrecision(m []float64, flipped []bool) float64 {
	order := make([]int, len(m))
	for i := range order {
		order[i] = i
	}
	slices.SortFunc(order, func(a, b int) int {
		switch {
		case m[a] < m[b]:
			return -1
		case m[a] > m[b]:
			return 1
		}
		return 0
	})
	var hits, all, sum float64
	for lo := 0; lo < len(order); {
		hi, new := lo, 0.
		for hi < len(order) && m[order[hi]]-m[order[lo]] <= 1e-9 {
			if flipped[order[hi]] {
				new++
			}
			hi++
		}
		hits += new
		sum += new * hits / float64(hi)
		all += new
		lo = hi
	}
	return sum / all
}

// recovered is the share of planted flips among as many rows of lowest margin as there are flips.
func recovered(m []float64, flipped []bool) float64 {
	order := make([]int, len(m))
	var all int
	for i := range order {
		order[i] = i
		if flipped[i] {
			all++
		}
	}
	slices.SortStableFunc(order, func(a, b int) int {
		if m[a] < m[b] {
			return -1
		}
		if m[a] > m[b] {
			return 1
		}
		return 0
	})
	var hits float64
	for _, i := range order[:all] {
		if flipped[i] {
			hits++
		}
	}
	return hits / float64(all)
}
