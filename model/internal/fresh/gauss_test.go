package fresh

import (
	"math"
	"math/rand/v2"
	"testing"
)

func TestDecayIsTheExponential(t *testing.T) {
	k := &Kernel{Gamma: 1, Dim: 1, Landmarks: []float32{0}}
	k.prepare()
	dst := make([]float32, 4)
	for y := 0.0; y < 100; y += 0.00317 {
		want := math.Exp(-float64(float32(y)))
		dst[0] = float32(y)
		k.decays(dst, 0)
		if got := float64(dst[0]); math.Abs(got-want) > 5e-6*want+1e-37 {
			t.Fatalf("exp(−%v) is %v, got %v", y, want, got)
		}
	}
	for y, want := range map[float64]float32{0: 1, -1e-6: 1, math.Inf(1): 0, 1e30: 0, math.NaN(): 1} {
		dst[0] = float32(y)
		if k.decays(dst, 0); dst[0] != want {
			t.Errorf("at %v: %v, wanted %v", y, dst[0], want)
		}
	}
}

func TestKernelValuesAreGaussian(t *testing.T) {
	rng := rand.New(rand.NewPCG(2, 1))
	k := &Kernel{Gamma: 0.7, Dim: 5}
	for range 5 * 33 {
		k.Landmarks = append(k.Landmarks, float32(rng.NormFloat64()))
	}
	k.prepare()
	u, got := make([]float32, 6), k.room()
	for range 20 {
		for i := range u {
			u[i] = float32(rng.NormFloat64()) * float32(rng.IntN(2))
		}
		k.values(u, got)
		for j, v := range got {
			d2 := 0.0
			for i := range 5 {
				d := float64(u[i]) - float64(k.Landmarks[j*5+i])
				d2 += d * d
			}
			if want := math.Exp(-0.7 * d2); math.Abs(float64(v)-want) > 2e-6 {
				t.Fatalf("landmark %d: %v, wanted %v", j, v, want)
			}
		}
	}
}

// What is computed four numbers at a time is bit for bit what the plain form computes.
func TestKernelsAreTheSameEverywhere(t *testing.T) {
	rng := rand.New(rand.NewPCG(7, 1))
	odd := []float32{0, float32(math.Copysign(0, -1)), float32(math.NaN()), float32(math.Inf(1)), 1e-40, 87, 87.00001, -3}
	for _, shape := range [][2]int{{1, 1}, {32, 3}, {33, 30}, {192, 31}} {
		k := &Kernel{Gamma: 0.3, Dim: shape[1]}
		for range shape[0] * shape[1] {
			k.Landmarks = append(k.Landmarks, float32(rng.NormFloat64()))
		}
		k.prepare()
		u := make([]float32, k.Dim)
		for try := range 40 {
			for i := range u {
				u[i] = float32(rng.NormFloat64()) * float32(rng.IntN(2))
				if try%2 == 1 && rng.IntN(8) == 0 {
					u[i] = odd[rng.IntN(len(odd))]
				}
			}
			got, want := make([]float32, len(k.norm)), make([]float32, len(k.norm))
			k.distances(got, u)
			distancesPlain(want, k.norm, k.across, u)
			wantBits(t, "distance", got, want)
			for i := range got {
				got[i] *= float32(try)
				if try%2 == 1 {
					got[i] = odd[rng.IntN(len(odd))]
				}
			}
			copy(want, got)
			k.decays(got, 0.125)
			decaysPlain(want, 0.125, &k.series)
			wantBits(t, "decay", got, want)
		}
	}
}

// wantBits tells apart everything but one NaN from another.
func wantBits(t *testing.T, what string, got, want []float32) {
	t.Helper()
	for i, w := range want {
		if math.Float32bits(got[i]) != math.Float32bits(w) && (got[i] == got[i] || w == w) {
			t.Fatalf("%s %d: %v, wanted %v", what, i, got[i], w)
		}
	}
}
