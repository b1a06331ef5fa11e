// Package noise turns class scores into probabilities: it fits, by expectation–maximisation, how scores become class
// probabilities and how true labels become observed ones, averages several such models by their evidence, and gives
// for each row the probability that its observed label is wrong.
//
// A model of one row with true class y, observed class o and source s:
//
//	y ~ softmax(η),  η_c = Σ_k a_k·S⁽ᵏ⁾_c + b_c           (S⁽ᵏ⁾: class scores of member k, a_k ≥ 0)
//	z = y, or the other of the two most probable classes with chance g = ½γ·exp(−m/τ)   (boundary flips; m: gap of the two logits)
//	o ~ row z of the flip matrix, off-diagonals times the source's factor ρ_s           (background flips)
//
// Class-conditional flips by EM: Bylander 1994; Mnih & Hinton 2012; Sukhbaatar et al. 2015.
package noise

import "math"

// Data is what a layer is fitted on: n rows, k classes. Slices are neither kept nor changed.
type Data struct {
	Classes  int
	Members  [][]float64 // each n·k: class scores of one member, row after row
	Observed []int32     // n, in [0, k)
	Source   []int32     // n, −1: none; nil when there are no sources
	Sources  int
	Workers  int // goroutines that fit models; the result does not depend on it; 0 means 1
}

// Rows is the number of rows.
func (d *Data) Rows() int { return len(d.Observed) }

// Slope adds −Mu·(L_C − L_D) to class C's logit and the same with the other sign to D's, where L = Σ a_k·S⁽ᵏ⁾: it
// flattens or steepens the boundary between two classes that overlap more, or less, than the others.
type Slope struct {
	C, D int
	Mu   float64
}

// Params of one noise model.
type Params struct {
	A      []float64 // weight of each member
	B      []float64 // bias of each class
	Slopes []Slope
	Flip   []float64 // k·k: P(observed = j | true = i) before a source's factor
	Gamma  float64   // strength of boundary flips; 0: none
	Tau    float64   // their reach in logits
	Rho    []float64 // factor of each source; nil: no source effect
}

func (p *Params) clone() *Params {
	q := *p
	q.A = append([]float64(nil), p.A...)
	q.B = append([]float64(nil), p.B...)
	q.Slopes = append([]Slope(nil), p.Slopes...)
	q.Flip = append([]float64(nil), p.Flip...)
	if p.Rho != nil {
		q.Rho = append([]float64(nil), p.Rho...)
	}
	return &q
}

// maxFlip is the most a row of a flip matrix may flip after a source's factor.
const maxFlip = 0.9

// row is the scratch of one row's inference.
type row struct {
	lin      []float64 // Σ a_k·S⁽ᵏ⁾
	eta      []float64 // logits
	prob     []float64 // softmax(eta)
	post     []float64 // P(true = y | observed)
	gap      float64   // between the two largest logits
	e        float64   // ½·exp(−gap/τ); 0 without boundary flips
	q        float64   // posterior share of boundary flips
	back     float64   // posterior share of background flips that changed the label
	right    float64   // posterior of the observed label being right
	one, two int       // the two most probable classes
}

func newRow(k int) *row {
	return &row{lin: make([]float64, k), eta: make([]float64, k), prob: make([]float64, k), post: make([]float64, k)}
}

// logits fills lin, eta, prob, gap, one and two from the members' scores; score(m) gives member m's k scores.
func (p *Params) logits(r *row, members [][]float64, i int) {
	k := len(p.B)
	clear(r.lin)
	for m, a := range p.A {
		if a == 0 {
			continue
		}
		for c, s := range members[m][i*k : i*k+k] {
			r.lin[c] += a * s
		}
	}
	for c, l := range r.lin {
		r.eta[c] = l + p.B[c]
	}
	for _, s := range p.Slopes {
		t := s.Mu * (r.lin[s.C] - r.lin[s.D])
		r.eta[s.C] -= t
		r.eta[s.D] += t
	}
	r.one, r.two = 0, 1
	if r.eta[1] > r.eta[0] {
		r.one, r.two = 1, 0
	}
	for c := 2; c < k; c++ {
		switch {
		case r.eta[c] > r.eta[r.one]:
			r.one, r.two = c, r.one
		case r.eta[c] > r.eta[r.two]:
			r.two = c
		}
	}
	top := r.eta[r.one]
	r.gap = top - r.eta[r.two]
	sum := 0.0
	for c, e := range r.eta {
		v := math.Exp(e - top)
		r.prob[c] = v
		sum += v
	}
	for c := range r.prob {
		r.prob[c] /= sum
	}
}

// infer fills post, q, back and right for a row with observed class o and source s (−1: none), after logits. It
// returns the log-likelihood of o.
func (p *Params) infer(r *row, o, s int) float64 {
	k := len(p.B)
	factor := 1.0
	if p.Rho != nil && s >= 0 {
		factor = p.Rho[s]
	}
	g := 0.0
	r.e = 0
	if p.Gamma > 0 {
		r.e = 0.5 * math.Exp(-r.gap/p.Tau)
		g = p.Gamma * r.e
	}
	z, swapped := 0.0, 0.0
	for y := range k {
		f := p.flip(y, o, factor)
		v := r.prob[y] * f
		if g > 0 && (y == r.one || y == r.two) {
			other := r.one + r.two - y
			w := r.prob[y] * g * p.flip(other, o, factor)
			v = v*(1-g) + w
			if y != o {
				swapped += w
			}
		}
		r.post[y] = v
		z += v
	}
	if z < 1e-300 {
		z = 1e-300
	}
	for y := range r.post {
		r.post[y] /= z
	}
	r.right = r.post[o]
	r.q = swapped / z
	r.back = max(0, 1-r.right-r.q)
	return math.Log(z)
}

// flip is P(observed = o | z = y) with the off-diagonals multiplied by factor, the row's total at most maxFlip.
func (p *Params) flip(y, o int, factor float64) float64 {
	k := len(p.B)
	if factor == 1 {
		return p.Flip[y*k+o]
	}
	off := 1 - p.Flip[y*k+y]
	if off*factor > maxFlip {
		factor = maxFlip / off
	}
	if y == o {
		return 1 - off*factor
	}
	return p.Flip[y*k+o] * factor
}

// uniform sets a flip matrix to one rate.
func uniform(k int, rate float64) []float64 {
	f := make([]float64, k*k)
	for i := range k {
		for j := range k {
			if i == j {
				f[i*k+j] = 1 - rate
			} else {
				f[i*k+j] = rate / float64(k-1)
			}
		}
	}
	return f
}
