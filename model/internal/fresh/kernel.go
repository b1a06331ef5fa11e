package fresh

import "labelweir/model/internal/kernel"

// Kernel gives the Gaussian kernel values exp(−Gamma·‖u − z_j‖²) of a row u and landmarks z_j.
type Kernel struct {
	Gamma     float64
	Dim       int       // numbers of a row that are read
	Landmarks []float32 // m·Dim

	across []float32   // −2·Gamma times the landmarks, as distancesPlain reads them
	norm   []float32   // Gamma·‖z_j‖²
	series [10]float32 // gauss
}

func packKernel(k *kernel.Map) Kernel {
	p := Kernel{Gamma: k.Gamma, Dim: k.Dim, Landmarks: k.Landmarks}
	p.prepare()
	return p
}

// Size is the number of landmarks.
func (k *Kernel) Size() int { return len(k.Landmarks) / max(k.Dim, 1) }

// room is memory for the values of one row.
func (k *Kernel) room() []float32 { return make([]float32, k.Size(), len(k.norm)) }

// prepare fills what is derived from the exported fields.
func (k *Kernel) prepare() {
	n := (k.Size() + wide - 1) / wide * wide
	k.across, k.norm, k.series = make([]float32, n*k.Dim), make([]float32, n), gauss()
	for j := range k.Size() {
		s := 0.0
		for i, v := range k.Landmarks[j*k.Dim : (j+1)*k.Dim] {
			k.across[(j/wide*k.Dim+i)*wide+j%wide] = float32(-2 * k.Gamma * float64(v))
			s += float64(v) * float64(v)
		}
		k.norm[j] = float32(k.Gamma * s)
	}
}

// values writes the kernel between u and every landmark to dst, which room made. Cost O(Size·Dim), less where u has
// zeros.
func (k *Kernel) values(u, dst []float32) {
	u, dst = u[:k.Dim], dst[:len(k.norm)]
	k.distances(dst, u)
	k.decays(dst, float32(k.Gamma)*dot(u, u))
}
