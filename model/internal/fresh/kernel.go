package fresh

import (
	"math"

	"gonum.org/v1/gonum/blas/blas32"

	"labelweir/model/internal/kernel"
)

// Kernel gives the Gaussian kernel values exp(−Gamma·‖u − z_j‖²) of a row u and landmarks z_j.
type Kernel struct {
	Gamma     float64
	Dim       int       // numbers of a row that are read
	Landmarks []float32 // m·Dim

	across []float32 // Dim·m: number i of every landmark
	norm   []float32 // Gamma·‖z_j‖²
	powers [pieces]uint32
}

func packKernel(k *kernel.Map) Kernel {
	p := Kernel{Gamma: k.Gamma, Dim: k.Dim, Landmarks: k.Landmarks}
	p.prepare()
	return p
}

// Size is the number of landmarks.
func (k *Kernel) Size() int { return len(k.Landmarks) / max(k.Dim, 1) }

// prepare fills what is derived from the exported fields.
func (k *Kernel) prepare() {
	m := k.Size()
	k.across = make([]float32, len(k.Landmarks))
	k.norm = make([]float32, m)
	for j := range m {
		s := 0.0
		for i, v := range k.Landmarks[j*k.Dim : (j+1)*k.Dim] {
			k.across[i*m+j] = v
			s += float64(v) * float64(v)
		}
		k.norm[j] = float32(k.Gamma * s)
	}
	for i := range k.powers {
		k.powers[i] = math.Float32bits(float32(math.Exp2(-float64(i) / pieces)))
	}
}

// values writes the kernel between u and every landmark. len(dst) = Size(). Cost O(Size·Dim), less where u has zeros.
func (k *Kernel) values(u []float32, dst []float32) {
	copy(dst, k.norm)
	to := blas32.Vector{N: len(dst), Inc: 1, Data: dst}
	gamma, uu := float32(k.Gamma), float32(0)
	for i, v := range u[:k.Dim] {
		if v == 0 {
			continue
		}
		uu += v * v
		blas32.Axpy(-2*gamma*v, blas32.Vector{N: len(dst), Inc: 1, Data: k.across[i*len(dst) : (i+1)*len(dst)]}, to)
	}
	uu *= gamma
	for j, v := range dst {
		dst[j] = k.decay(uu + v)
	}
}

// pieces is the number of parts a power of two is cut into.
const pieces = 64

// decay is exp(−y) with a relative error below 5·10⁻⁶: a power of ½ from a table times a short series. Negative y, which only rounding
// brings about, and NaN count as 0.
func (k *Kernel) decay(y float32) float32 {
	const last = 87 // exp(−87) is about the smallest float32 of full precision
	if !(y > 0) {
		return 1
	}
	if y > last {
		return 0
	}
	t := y * (pieces / math.Ln2)
	n := uint32(t)
	r := (t - float32(n)) * (math.Ln2 / pieces)
	p := math.Float32frombits(k.powers[n%pieces] - n/pieces<<23)
	return p * (1 - r*(1-r*(0.5-r/6)))
}
