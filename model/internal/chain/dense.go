package chain

// dotPlain is Σ x·w over the length of x, in eight sums so that additions need not wait for each other. Here and below
// float64(…) keeps products from being fused with sums, so that every machine computes the same.
func dotPlain(x []float32, w []float64) float64 {
	w = w[:len(x)]
	var s [8]float64
	for len(x) >= 8 && len(w) >= 8 {
		for j, v := range x[:8] {
			s[j] += float64(float64(v) * w[j])
		}
		x, w = x[8:], w[8:]
	}
	for j, v := range x {
		s[j%2] += float64(float64(v) * w[j])
	}
	return ((s[0] + s[2]) + (s[4] + s[6])) + ((s[1] + s[3]) + (s[5] + s[7]))
}

// addPlain adds t·x to w.
func addPlain(w []float64, t float64, x []float32) {
	w = w[:len(x)]
	for j, v := range x {
		w[j] += float64(t * float64(v))
	}
}
