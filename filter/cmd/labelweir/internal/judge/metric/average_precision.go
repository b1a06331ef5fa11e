package metric

import (
	"math"
	"sort"
)

// AveragePrecision is the mean precision over the wrong rows when rows are gone through by falling score:
// Σ (R_n − R_{n−1})·P_n over the distinct scores, as in scikit-learn's average_precision_score, so that rows of one
// score count together. A NaN score counts as 0. It is NaN when no row is wrong; len(p) = len(wrong). O(n log n).
func AveragePrecision(wrong []bool, p []float64) float64 {
	if len(p) != len(wrong) {
		panic("metric: shapes differ")
	}
	order := make([]int, len(p))
	total := 0
	for i := range order {
		order[i] = i
		if wrong[i] {
			total++
		}
	}
	if total == 0 {
		return math.NaN()
	}
	sort.SliceStable(order, func(a, b int) bool { return ranked(p[order[a]]) > ranked(p[order[b]]) })
	sum, hits, before := 0.0, 0, 0
	for i, row := range order {
		if wrong[row] {
			hits++
		}
		if i+1 < len(order) && ranked(p[order[i+1]]) == ranked(p[row]) {
			continue
		}
		sum += float64(hits-before) * float64(hits) / float64(i+1)
		before = hits
	}
	return sum / float64(total)
}

func ranked(p float64) float64 {
	if math.IsNaN(p) {
		return 0
	}
	return p
}
