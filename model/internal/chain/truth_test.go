package chain

import (
	"encoding/json"
	"math"
	"os"
	"testing"

	"labelweir/model/internal/loss"
)

// solve runs the convex problem out.
func solve(p *Problem, tolerance float64) State {
	inf := math.Inf(-1)
	return Graduated(p, []Stage{{Q: inf, Rounds: 5000, Tolerance: tolerance}}, []float64{inf}, newRand(1), &Scratch{})[0]
}

// LIBLINEAR's optima, by scikit-learn's LinearSVC; testdata/linearsvc.py wrote them.
func TestUnboundedIsLiblinearsSquaredHinge(t *testing.T) {
	text, err := os.ReadFile("testdata/linearsvc.json")
	if err != nil {
		t.Fatal(err)
	}
	var golden struct {
		Cases []struct {
			Lambda float64
			X      [][]float64
			Y      []int8
			Omega  []float64
			W      []float64
			J      float64
		}
	}
	if err := json.Unmarshal(text, &golden); err != nil || len(golden.Cases) == 0 {
		t.Fatalf("%d cases, %v", len(golden.Cases), err)
	}
	for i, c := range golden.Cases {
		d := len(c.X[0])
		p := &Problem{Design: &Design{N: len(c.X), Dense: d}, Y: c.Y, Omega: c.Omega, Lambda: c.Lambda}
		for r, row := range c.X {
			p.Rows = append(p.Rows, int32(r))
			for _, v := range row {
				p.X = append(p.X, float32(v))
			}
		}
		st := solve(p, 1e-9)
		if math.Abs(st.J-c.J) > 1e-9 {
			t.Errorf("case %d: J=%.12f, LIBLINEAR %.12f", i, st.J, c.J)
		}
		for k, w := range c.W {
			if math.Abs(st.W[k]-w) > 1e-5*(1+math.Abs(w)) {
				t.Errorf("case %d: w[%d]=%.8f, LIBLINEAR %.8f", i, k, st.W[k], w)
			}
		}
	}
}

// gonum's L-BFGS on the primal.
func TestUnboundedIsTheConvexOptimum(t *testing.T) {
	p, _ := linear(500, 12, 0, 0, .2, newRand(8))
	st := solve(p, 1e-8)
	w := convex(t, p, squaredHinge)
	if got, want := st.J, objective(p, math.Inf(-1), w); math.Abs(got-want) > 1e-8 {
		t.Errorf("J=%.10f, L-BFGS on the primal finds %.10f", got, want)
	}
}

// At an end that converged, w is where the derivative of J vanishes, no weight leaves ±1/√λ, and J is below J(0) = 1.
func TestEndsAreStationaryAndBounded(t *testing.T) {
	const h = 1e-5
	for seed := range uint64(6) {
		for _, trees := range []int{0, 8} {
			p, _ := linear(400, 7, trees, 6, .25, newRand(seed))
			for _, q := range []float64{-1, -.5, 0} {
				st := Graduated(p, append(Path([]float64{q}), Stage{Q: q + 1e-9, Rounds: 3000, Tolerance: 1e-10}), []float64{q + 1e-9}, newRand(1), &Scratch{})[0]
				radius := loss.Radius(p.Lambda)
				if st.J > 1 || squares(st.W) > radius*radius {
					t.Errorf("seed %d q=%v: J=%v, ‖w‖²=%v, bounds 1 and %v", seed, q, st.J, squares(st.W), radius*radius)
				}
				if st.Status != Converged {
					continue
				}
				for c := range st.W {
					w := append([]float64(nil), st.W...)
					w[c] += h
					up := objective(p, st.Q, w)
					w[c] -= 2 * h
					down := objective(p, st.Q, w)
					if g := (up - down) / (2 * h); math.Abs(g) > 1e-5 {
						t.Errorf("seed %d trees %d q=%v: dJ/dw[%d] = %v", seed, trees, q, c, g)
					}
				}
			}
		}
	}
	p, _ := linear(200, 5, 4, 6, .2, newRand(1))
	for _, q := range []float64{-1, -.5, 0} {
		if got := objective(p, q, make([]float64, p.Columns())); math.Abs(got-1) > 1e-12 {
			t.Errorf("J(0) = %v at q=%v, want 1", got, q)
		}
	}
}

// The conditions that the derivation of the dual ends in: w = Σ αyx and α = ωξ/λ on kept rows, 0 on dropped ones.
func TestEndsMeetTheDualConditions(t *testing.T) {
	p, _ := linear(300, 6, 5, 4, .2, newRand(3))
	q := -.5
	st := Graduated(p, append(Path([]float64{q - .01}), Stage{Q: q, Rounds: 3000, Tolerance: 1e-10}), []float64{q}, newRand(1), &Scratch{})[0]
	if st.Status != Converged {
		t.Fatalf("status %v", st.Status)
	}
	w := make([]float64, p.Columns())
	for k := range p.Rows {
		a := st.Alpha[k] * float64(p.Y[k])
		var m float64
		for c := range p.Dense {
			v := float64(p.X[k*p.Dense+c])
			w[c] += a * v
			m += float64(p.Y[k]) * v * st.W[c]
		}
		for _, leaf := range p.Leaves[k*p.Trees : (k+1)*p.Trees] {
			w[p.Dense+int(leaf)] += a * p.LeafValue
			m += float64(p.Y[k]) * p.LeafValue * st.W[p.Dense+int(leaf)]
		}
		want := p.Omega[k] * math.Max(0, 1-m) / p.Lambda
		if m <= q {
			want = 0
		}
		if math.Abs(st.Alpha[k]-want) > 1e-6 || st.Keep[k] != (m > q) {
			t.Errorf("row %d: α=%v, want %v; kept %v at margin %v", k, st.Alpha[k], want, st.Keep[k], m)
		}
	}
	for c, v := range w {
		if math.Abs(v-st.W[c]) > 1e-9 {
			t.Errorf("w[%d]=%v, Σ αyx gives %v", c, st.W[c], v)
		}
	}
}

// A leaf is a feature like any other: the same problem with its leaves written out as dense columns has the same
// optimum, and a matrix of more columns than 16 bits count has it too.
func TestLeavesAreColumns(t *testing.T) {
	p, _ := linear(200, 4, 6, 5, .15, newRand(9))
	want := solve(p, 1e-8)
	dense := &Problem{Design: &Design{N: p.N, Dense: p.Columns()}, Rows: p.Rows, Y: p.Y, Omega: p.Omega, Lambda: p.Lambda}
	far := *p.Design
	far.LeafCols += narrow
	far.Leaves = nil
	for r := range p.N {
		row := make([]float32, p.Columns())
		copy(row, p.X[r*p.Dense:(r+1)*p.Dense])
		for _, leaf := range p.Leaves[r*p.Trees : (r+1)*p.Trees] {
			row[p.Dense+int(leaf)] = float32(p.LeafValue)
			far.Leaves = append(far.Leaves, leaf+narrow)
		}
		dense.X = append(dense.X, row...)
	}
	wide := *p
	wide.Design = &far
	for name, other := range map[string]*Problem{"dense": dense, "wide": &wide} {
		got := solve(other, 1e-8)
		if math.Abs(got.J-want.J) > 1e-7 {
			t.Errorf("%s: J=%.9f, as leaves %.9f", name, got.J, want.J)
		}
		if a := Annealed(other, -.5, &got, DefaultAnneal(), newRand(1), &Scratch{}); math.Abs(a.J-objective(other, -.5, a.W)) > 1e-9 {
			t.Errorf("%s: annealed J=%v, from its weights %v", name, a.J, objective(other, -.5, a.W))
		}
	}
}
