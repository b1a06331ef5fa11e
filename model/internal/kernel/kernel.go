// Package kernel gives linear scorers smooth boundaries: it maps encoded rows to features whose inner products
// approximate a Gaussian kernel, by the Nyström method (Williams & Seeger 2001).
package kernel

import (
	"math"
	"math/rand/v2"

	"gonum.org/v1/gonum/mat"
)

// Map takes a row u to L⁻¹·k(u), where k_j(u) = exp(−Gamma·‖u − z_j‖²) over the landmarks z_j and K = L·Lᵀ is the
// kernel matrix of the landmarks. It is immutable.
type Map struct {
	Gamma     float64
	Dim       int       // numbers of a row that are used
	Landmarks []float32 // m·Dim
	Lower     []float64 // m·m, row after row: L⁻¹
	norm      []float64 // ‖z_j‖²
}

// jitter keeps the kernel matrix of near-equal landmarks invertible.
const jitter = 1e-3

// New takes up to m random rows of x (n·stride, the first dim numbers of each) as landmarks. It returns nil if there
// are no numbers or the landmarks' kernel matrix cannot be factored. Cost O(m³ + m²·dim).
func New(x []float32, n, stride, dim, m int, gamma float64, rng *rand.Rand) *Map {
	m = min(m, n)
	if m == 0 || dim == 0 {
		return nil
	}
	k := &Map{Gamma: gamma, Dim: dim, Landmarks: make([]float32, 0, m*dim)}
	for _, i := range rng.Perm(n)[:m] {
		k.Landmarks = append(k.Landmarks, x[i*stride:i*stride+dim]...)
	}
	k.measure()
	gram := mat.NewSymDense(m, nil)
	row := make([]float64, m)
	for i := range m {
		k.values(k.Landmarks[i*dim:(i+1)*dim], row)
		for j := i; j < m; j++ {
			v := row[j]
			if i == j {
				v += jitter
			}
			gram.SetSym(i, j, v)
		}
	}
	var chol mat.Cholesky
	if !chol.Factorize(gram) {
		return nil
	}
	var l, inv mat.TriDense
	chol.LTo(&l)
	if inv.InverseTri(&l) != nil {
		return nil
	}
	k.Lower = make([]float64, m*m)
	for i := range m {
		for j := 0; j <= i; j++ {
			k.Lower[i*m+j] = inv.At(i, j)
		}
	}
	return k
}

// measure fills norm.
func (k *Map) measure() {
	k.norm = make([]float64, k.Size())
	for j := range k.norm {
		for _, v := range k.Landmarks[j*k.Dim : (j+1)*k.Dim] {
			k.norm[j] += float64(v) * float64(v)
		}
	}
}

// Size is the number of landmarks, which is also that of features.
func (k *Map) Size() int { return len(k.Landmarks) / k.Dim }

// values writes the kernel between u and every landmark. len(dst) = Size().
func (k *Map) values(u []float32, dst []float64) {
	u = u[:k.Dim]
	var uu float64
	for _, v := range u {
		uu += float64(v) * float64(v)
	}
	for j := range dst {
		z := k.Landmarks[j*k.Dim : (j+1)*k.Dim]
		var a, b float32
		i := 0
		for ; i+1 < len(u); i += 2 {
			a += u[i] * z[i]
			b += u[i+1] * z[i+1]
		}
		if i < len(u) {
			a += u[i] * z[i]
		}
		dst[j] = math.Exp(-k.Gamma * max(0, uu+k.norm[j]-2*float64(a+b)))
	}
}

// Features writes the features of u to dst (len Size()); scratch has the same length.
func (k *Map) Features(u []float32, dst []float32, scratch []float64) {
	m := k.Size()
	k.values(u, scratch)
	for i := range m {
		s := 0.0
		for j, l := range k.Lower[i*m : i*m+i+1] {
			s += l * scratch[j]
		}
		dst[i] = float32(s)
	}
}

// Fold turns weights on features into weights on kernel values, wᵀL⁻¹, so that a decision costs one pass over the
// landmarks.
func (k *Map) Fold(w []float64) []float64 {
	m := k.Size()
	out := make([]float64, m)
	for i, v := range w[:m] {
		for j, l := range k.Lower[i*m : i*m+i+1] {
			out[j] += v * l
		}
	}
	return out
}
