package fresh

import (
	"math"

	"labelweir/model/internal/kernel"
)

// Kernel gives the Gaussian kernel values exp(−Gamma·‖u − z_j‖²) of a row u and landmarks z_j.
type Kernel struct {
	Gamma     float64
	Dim       int       // numbers of a row that are read
	Landmarks []float32 // m·Dim

	norm []float32 // ‖z_j‖²
}

func packKernel(k *kernel.Map) Kernel {
	p := Kernel{Gamma: k.Gamma, Dim: k.Dim, Landmarks: k.Landmarks}
	p.prepare()
	return p
}

// prepare fills what is derived from the exported fields.
func (k *Kernel) prepare() {
	k.norm = make([]float32, k.Size())
	for j := range k.norm {
		s := 0.0
		for _, v := range k.Landmarks[j*k.Dim : (j+1)*k.Dim] {
			s += float64(v) * float64(v)
		}
		k.norm[j] = float32(s)
	}
}

// Size is the number of landmarks.
func (k *Kernel) Size() int { return len(k.Landmarks) / max(k.Dim, 1) }

// values writes the kernel between u and every landmark. len(dst) = Size().
func (k *Kernel) values(u []float32, dst []float32) {
	u = u[:k.Dim]
	var uu float32
	for _, v := range u {
		uu += v * v
	}
	for j := range dst {
		z := k.Landmarks[j*k.Dim : (j+1)*k.Dim]
		var a float32
		for i, v := range u {
			a += v * z[i]
		}
		dst[j] = float32(math.Exp(-k.Gamma * float64(max(0, uu+k.norm[j]-2*a))))
	}
}
