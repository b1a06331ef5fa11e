package metric

import "math"

// FlipRates counts P(observed = j | true = i) over the rows into a k×k matrix, row i for true class i. Codes outside
// [0,k) are left out; a class without rows has a row of NaN. len(truth) = len(observed).
func FlipRates(truth, observed []int32, k int) [][]float64 {
	if len(truth) != len(observed) {
		panic("metric: shapes differ")
	}
	rates := make([][]float64, k)
	total := make([]float64, k)
	for i := range rates {
		rates[i] = make([]float64, k)
	}
	inside := func(c int32) bool { return c >= 0 && int(c) < k }
	for r, i := range truth {
		if j := observed[r]; inside(i) && inside(j) {
			rates[i][j]++
			total[i]++
		}
	}
	for i := range rates {
		for j := range rates[i] {
			rates[i][j] /= total[i]
		}
	}
	return rates
}

// MatrixError is the largest and the mean absolute difference of the entries, leaving out those where either is NaN;
// both are NaN when nothing is left. The shapes of a and b must agree.
func MatrixError(a, b [][]float64) (largest, mean float64) {
	n := 0.0
	for i := range a {
		for j := range a[i] {
			d := math.Abs(a[i][j] - b[i][j])
			if math.IsNaN(d) {
				continue
			}
			largest = max(largest, d)
			mean += d
			n++
		}
	}
	if n == 0 {
		return math.NaN(), math.NaN()
	}
	return largest, mean / n
}
