package chain

import (
	"math"
	"testing"
)

// What is computed two numbers at a time is bit for bit what the plain form computes, and nothing beyond is touched.
func TestDenseRowsAreTheSameEverywhere(t *testing.T) {
	rng := newRand(3)
	for n := range 70 {
		x, w := make([]float32, n), make([]float64, n+3)
		for i := range w {
			w[i] = rng.NormFloat64()
		}
		exact := 0.0
		for i := range x {
			x[i] = float32(rng.NormFloat64())
			exact += float64(x[i]) * w[i]
		}
		got := dotDense(x, w)
		if want := dotPlain(x, w); got != want || math.Abs(got-exact) > 1e-12 {
			t.Errorf("%d numbers: %v, wanted %v, about %v", n, got, want, exact)
		}
		want, step := append([]float64(nil), w...), rng.NormFloat64()
		addPlain(want, step, x)
		addDense(w, step, x)
		for i, v := range want {
			if w[i] != v {
				t.Errorf("%d numbers: weight %d is %v, wanted %v", n, i, w[i], v)
			}
		}
	}
}
