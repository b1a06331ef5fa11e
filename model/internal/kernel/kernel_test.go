package kernel

import (
	"math"
	"math/rand/v2"
	"slices"
	"testing"

	"gonum.org/v1/gonum/mat"
)

// rows draws n rows of d numbers and, behind each, the constant that a kernel does not read.
func rows(n, d int, seed uint64) []float32 {
	rng := rand.New(rand.NewPCG(seed, 1))
	x := make([]float32, 0, n*(d+1))
	for range n {
		for range d {
			x = append(x, float32(rng.NormFloat64()/math.Sqrt(float64(d))))
		}
		x = append(x, 1)
	}
	return x
}

func gauss(u, v []float32, gamma float64) float64 {
	s := 0.0
	for i := range u {
		d := float64(u[i]) - float64(v[i])
		s += d * d
	}
	return math.Exp(-gamma * s)
}

func features(k *Map, u []float32) []float32 {
	f := make([]float32, k.Size())
	k.Features(u, f, make([]float64, k.Size()))
	return f
}

func inner(a, b []float32) float64 {
	s := 0.0
	for i := range a {
		s += float64(a[i]) * float64(b[i])
	}
	return s
}

// With every row a landmark the features' inner products are the Gaussian kernel up to the jitter: K(K + εI)⁻¹K differs
// from K by ε(I − ε(K + εI)⁻¹), which has no entry above ε.
func TestAllRowsAsLandmarksGiveTheGaussianKernel(t *testing.T) {
	const n, d = 60, 5
	for _, gamma := range []float64{0.25, 1, 8} {
		x := rows(n, d, 2)
		k := New(x, n, d+1, d, n, gamma, rand.New(rand.NewPCG(1, 1)))
		if k.Size() != n {
			t.Fatalf("%d landmarks", k.Size())
		}
		for i := range n {
			for j := range i + 1 {
				u, v := x[i*(d+1):i*(d+1)+d], x[j*(d+1):j*(d+1)+d]
				got, want := inner(features(k, u), features(k, v)), gauss(u, v, gamma)
				if math.Abs(got-want) > 1.1*jitter {
					t.Fatalf("γ %v, rows %d and %d: %v, the kernel is %v", gamma, i, j, got, want)
				}
			}
		}
	}
}

// For other rows the inner product is k(u)ᵀ(K + εI)⁻¹k(v) (Williams & Seeger 2001, eq. 9), here solved directly.
func TestFeaturesAreThoseOfNystroem(t *testing.T) {
	const n, d, m = 80, 4, 20
	x := rows(n, d, 3)
	k := New(x, n, d+1, d, m, 1, rand.New(rand.NewPCG(1, 1)))
	gram := mat.NewDense(m, m, nil)
	landmark := func(j int) []float32 { return k.Landmarks[j*d : (j+1)*d] }
	for i := range m {
		for j := range m {
			v := gauss(landmark(i), landmark(j), 1)
			if i == j {
				v += jitter
			}
			gram.Set(i, j, v)
		}
	}
	near := func(u []float32) *mat.VecDense {
		v := mat.NewVecDense(m, nil)
		for j := range m {
			v.SetVec(j, gauss(u, landmark(j), 1))
		}
		return v
	}
	for i := range 20 {
		u, v := x[i*(d+1):i*(d+1)+d], x[(79-i)*(d+1):(79-i)*(d+1)+d]
		var solved mat.VecDense
		if err := solved.SolveVec(gram, near(v)); err != nil {
			t.Fatal(err)
		}
		got, want := inner(features(k, u), features(k, v)), mat.Dot(near(u), &solved)
		if math.Abs(got-want) > 1e-4 {
			t.Errorf("rows %d and %d: %v, solved %v", i, 79-i, got, want)
		}
	}
}

func TestFoldedWeightsGiveTheSameDecision(t *testing.T) {
	const n, d, m = 50, 3, 12
	x := rows(n, d, 4)
	k := New(x, n, d+1, d, m, 1, rand.New(rand.NewPCG(1, 1)))
	w := make([]float64, m+1)
	for i := range w {
		w[i] = float64(i%5) - 2
	}
	folded := k.Fold(w[:m])
	for i := range n {
		u := x[i*(d+1) : i*(d+1)+d]
		want, got := 0.0, 0.0
		for j, f := range features(k, u) {
			want += w[j] * float64(f)
			got += folded[j] * gauss(u, k.Landmarks[j*d:(j+1)*d], 1)
		}
		if math.Abs(got-want) > 1e-4 {
			t.Errorf("row %d: %v, unfolded %v", i, got, want)
		}
	}
}

func TestOddLandmarks(t *testing.T) {
	same := slices.Repeat([]float32{0.5, 0.25, 1}, 9)
	if k := New(same, 9, 3, 2, 9, 1, rand.New(rand.NewPCG(1, 1))); k == nil {
		t.Error("equal rows give no kernel")
	} else if f := features(k, same[:2]); math.Abs(inner(f, f)-1) > jitter {
		t.Errorf("a row's kernel with itself is %v", inner(f, f))
	}
	if New(nil, 0, 3, 2, 5, 1, rand.New(rand.NewPCG(1, 1))) != nil {
		t.Error("a kernel without rows")
	}
	if New([]float32{1, 1}, 2, 1, 0, 5, 1, rand.New(rand.NewPCG(1, 1))) != nil {
		t.Error("a kernel without numbers")
	}
	x := rows(6, 2, 5)
	x[4] = float32(math.NaN())
	if New(x, 6, 3, 2, 6, 1, rand.New(rand.NewPCG(1, 1))) != nil {
		t.Error("a kernel of what is not a number")
	}
}
