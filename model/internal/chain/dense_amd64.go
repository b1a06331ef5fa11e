package chain

// dotDense is dotPlain, two numbers at a time. len(w) ≥ len(x).
//
//go:noescape
func dotDense(x []float32, w []float64) float64

// addDense is addPlain, two numbers at a time. len(w) ≥ len(x).
//
//go:noescape
func addDense(w []float64, t float64, x []float32)
