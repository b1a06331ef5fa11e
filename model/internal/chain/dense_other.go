//go:build !amd64

package chain

func dotDense(x []float32, w []float64) float64 { return dotPlain(x, w) }

func addDense(w []float64, t float64, x []float32) { addPlain(w, t, x) }
