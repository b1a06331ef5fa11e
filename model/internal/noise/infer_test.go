package noise

import (
	"math"
	"math/rand/v2"
	"testing"

	"pgregory.net/rapid"
)

// randomParams draws a model of k classes with everything a model may have, or not.
func randomParams(t *rapid.T, k, members, sources int) *Params {
	rng := rand.New(rand.NewPCG(rapid.Uint64().Draw(t, "seed"), 1))
	p := &Params{Tau: 0.7 + 7*rng.Float64(), Flip: make([]float64, k*k)}
	for range members {
		p.A = append(p.A, 3*rng.Float64())
	}
	for i := range k {
		p.B = append(p.B, rng.NormFloat64())
		left := 0.6 * rng.Float64()
		for j := range k {
			if j != i {
				p.Flip[i*k+j] = left / float64(k-1)
			}
		}
		p.Flip[i*k+i] = 1 - left
	}
	if rapid.Bool().Draw(t, "boundary") {
		p.Gamma = 0.98 * rng.Float64()
	}
	if rapid.Bool().Draw(t, "source") {
		for range sources {
			p.Rho = append(p.Rho, 4*rng.Float64()*rng.Float64())
		}
	}
	if rapid.Bool().Draw(t, "slope") {
		c := rng.IntN(k)
		p.Slopes = append(p.Slopes, Slope{C: c, D: (c + 1 + rng.IntN(k-1)) % k, Mu: rng.Float64() - 0.5})
	}
	return p
}

// byEnumeration sums over what may have happened: true class y, label z after boundary flips, observed class o. It gives
// the likelihood of o, and the posteriors of y and of a boundary flip that made the label wrong.
func byEnumeration(p *Params, r *row, o, src int) (like float64, post []float64, flipped float64) {
	k := len(p.B)
	post = make([]float64, k)
	g := 0.0
	if p.Gamma > 0 {
		g = p.Gamma / 2 * math.Exp(-r.gap/p.Tau)
	}
	factor := 1.0
	if p.Rho != nil && src >= 0 {
		factor = p.Rho[src]
	}
	for y := range k {
		for z := range k {
			pz := 0.0
			switch {
			case y != r.one && y != r.two:
				if z == y {
					pz = 1
				}
			case z == y:
				pz = 1 - g
			case z == r.one || z == r.two:
				pz = g
			}
			v := r.prob[y] * pz * p.flip(z, o, factor)
			like += v
			post[y] += v
			if z != y && y != o {
				flipped += v
			}
		}
	}
	for y := range post {
		post[y] /= like
	}
	return like, post, flipped / like
}

func TestInferenceIsTheModelsOwn(t *testing.T) {
	rapid.Check(t, func(t *rapid.T) {
		k := rapid.IntRange(2, 5).Draw(t, "classes")
		p := randomParams(t, k, 2, 3)
		members := [][]float64{make([]float64, k), make([]float64, k)}
		for m := range members {
			for c := range k {
				members[m][c] = rapid.Float64Range(-4, 4).Draw(t, "score")
			}
		}
		src := rapid.IntRange(-1, 2).Draw(t, "source of the row")
		r := newRow(k)
		p.logits(r, members, 0)
		total := 0.0
		for o := range k {
			ll := p.infer(r, o, src)
			total += math.Exp(ll)
			like, post, flipped := byEnumeration(p, r, o, src)
			if math.Abs(math.Exp(ll)-like) > 1e-9 || math.Abs(r.q-flipped) > 1e-9 || math.Abs(r.right-post[o]) > 1e-9 {
				t.Fatalf("class %d: likelihood %v, boundary %v, right %v; counted %v, %v, %v", o, math.Exp(ll), r.q, r.right, like, flipped, post[o])
			}
			for y := range post {
				if math.Abs(r.post[y]-post[y]) > 1e-9 {
					t.Fatalf("class %d: posterior %v, counted %v", o, r.post, post)
				}
			}
			if math.Abs(r.right+r.q+r.back-1) > 1e-9 {
				t.Fatalf("class %d: right %v, boundary %v, background %v", o, r.right, r.q, r.back)
			}
		}
		if math.Abs(total-1) > 1e-9 {
			t.Fatalf("likelihoods of all observed classes sum to %v", total)
		}
	})
}

func TestJudgementsAreProbabilities(t *testing.T) {
	rapid.Check(t, func(t *rapid.T) {
		k := rapid.IntRange(2, 5).Draw(t, "classes")
		l := &Layer{Classes: k, Steps: []Step{{-1, 0.1}, {0, 0.3}, {2, 0.9}}}
		for _, w := range []float64{0.7, 0.3} {
			l.Models = append(l.Models, Model{Weight: w, P: *randomParams(t, k, 1, 3)})
		}
		scores := make([]float64, k)
		for c := range k {
			scores[c] = rapid.Float64Range(-500, 500).Draw(t, "score")
		}
		j := l.NewJudge()
		o, src := rapid.IntRange(0, k-1).Draw(t, "observed"), rapid.IntRange(-1, 3).Draw(t, "source of the row")
		got := j.Row([][]float64{scores}, 0, o, src)
		sum := 0.0
		for _, v := range j.post {
			sum += v
		}
		if !(got.Wrong >= 0 && got.Wrong <= 1) || got.Margin-got.Margin != 0 || got.Implied < 0 || got.Implied >= k || math.Abs(sum-1) > 1e-9 {
			t.Fatalf("%+v, posterior %v", got, j.post)
		}
		best := 0.0
		for _, v := range j.prob {
			best = max(best, v)
		}
		if (got.Margin > 1e-9 && j.prob[o] < best) || (got.Margin < -1e-9 && j.prob[o] == best) {
			t.Fatalf("margin %v with probabilities %v of observed %d", got.Margin, j.prob, o)
		}
	})
}

func TestCleanedChancesSumToOne(t *testing.T) {
	d, _ := plant{rows: 200, spread: 2, flip: []float64{0.8, 0.2, 0.1, 0.9}, seed: 3}.draw()
	l, _ := Quick(d)
	chance := make([]float64, 2*d.Rows())
	l.Clean(d, chance)
	for i := range d.Rows() {
		if a, b := chance[2*i], chance[2*i+1]; !(a >= 0 && b >= 0) || math.Abs(a+b-1) > 1e-9 {
			t.Fatalf("row %d: %v and %v", i, a, b)
		}
	}
}
