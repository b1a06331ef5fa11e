package noise

import (
	"math"

	"gonum.org/v1/gonum/mat"
)

// Precision of the normal priors on member weights, class biases and pair slopes.
const (
	ridgeA  = 0.01
	ridgeB  = 0.1
	ridgeMu = 1

	// likeness draws the members' shares of the logits, weight times root mean square score, together: with few rows
	// all members count about alike, with many the likelihood decides.
	likeness = 8
)

// With more than manyClasses classes, those less probable than unlikely are left out of a row's share in the Hessian of the
// biases, but for its diagonal: what is left stays positive definite, and the gradient, which decides where steps end, has all.
const (
	manyClasses = 12
	unlikely    = 1e-4
)

// newton gathers gradient and Hessian of Σ post·log softmax(η) in the member weights, biases and slopes over one pass
// and takes one damped step.
type newton struct {
	k, m, l int // classes, members, slopes
	grad    []float64
	hess    []float64 // full, dim×dim, the negative Hessian
	x       []float64 // dim·k: ∂η_c/∂θ of the current row, for members and slopes only
	mean    []float64
	size    []float64 // root mean square score of each member
	likely  []int     // classes of the current row that count for the biases' part of the Hessian
}

func newNewton(d *Data, p *Params) *newton {
	n := &newton{k: d.Classes, m: len(p.A), l: len(p.Slopes)}
	dim := n.m + n.l + n.k
	n.grad = make([]float64, dim)
	n.hess = make([]float64, dim*dim)
	n.x = make([]float64, (n.m+n.l)*n.k)
	n.mean = make([]float64, n.m+n.l)
	n.size = d.sizes()
	return n
}

// sizes are the root mean square scores of the members.
func (d *Data) sizes() []float64 {
	out := make([]float64, len(d.Members))
	for m, x := range d.Members {
		s := 0.0
		for _, v := range x {
			s += v * v
		}
		out[m] = math.Sqrt(s / float64(max(1, len(x))))
	}
	return out
}

// meanShare is the mean of the members' weights times their sizes.
func (p *Params) meanShare(size []float64) float64 {
	v := 0.0
	for m, a := range p.A {
		v += a * size[m]
	}
	return v / float64(max(1, len(p.A)))
}

func (n *newton) reset() {
	clear(n.grad)
	clear(n.hess)
}

// add adds row i.
func (n *newton) add(p *Params, r *row, members [][]float64, i int, w float64) {
	k, f := n.k, n.m+n.l
	dim := f + k
	for m := range n.m {
		x := n.x[m*k : m*k+k]
		copy(x, members[m][i*k:i*k+k])
		for _, s := range p.Slopes {
			t := s.Mu * (x[s.C] - x[s.D])
			x[s.C] -= t
			x[s.D] += t
		}
	}
	for l, s := range p.Slopes {
		x := n.x[(n.m+l)*k : (n.m+l+1)*k]
		clear(x)
		t := r.lin[s.C] - r.lin[s.D]
		x[s.C], x[s.D] = -t, t
	}
	for j := range f {
		x := n.x[j*k : j*k+k]
		mean, g := 0.0, 0.0
		for c, v := range x {
			mean += r.prob[c] * v
			g += (r.post[c] - r.prob[c]) * v
		}
		n.mean[j] = mean
		n.grad[j] += w * g
		for c, v := range x {
			n.hess[j*dim+f+c] += w * r.prob[c] * (v - mean)
		}
		for h := 0; h <= j; h++ {
			y := n.x[h*k : h*k+k]
			s := 0.0
			for c, v := range x {
				s += r.prob[c] * v * y[c]
			}
			n.hess[h*dim+j] += w * (s - mean*n.mean[h])
		}
	}
	n.likely = n.likely[:0]
	for c, p := range r.prob {
		if k <= manyClasses || p > unlikely {
			n.likely = append(n.likely, c)
		}
		n.grad[f+c] += w * (r.post[c] - p)
	}
	for at, c := range n.likely {
		pc := w * r.prob[c]
		row := n.hess[(f+c)*dim+f : (f+c)*dim+f+k]
		for _, e := range n.likely[at:] {
			row[e] -= pc * r.prob[e]
		}
	}
	for c, p := range r.prob {
		n.hess[(f+c)*(dim+1)] += w * p
	}
}

// step changes p by one Newton step, scaled down where it would leap: at most half of the largest weight and 1 a bias.
// Weights stay ≥ 0: one that would cross zero is set to zero and the rest is solved again without it.
func (n *newton) step(p *Params) {
	f := n.m + n.l
	dim := f + n.k
	mean := p.meanShare(n.size)
	for m, a := range p.A {
		n.grad[m] -= ridgeA*a + likeness*n.size[m]*(a*n.size[m]-mean)
		for h := 0; h <= m; h++ {
			n.hess[h*dim+m] -= likeness * n.size[h] * n.size[m] / float64(n.m)
		}
		n.hess[m*dim+m] += ridgeA + likeness*n.size[m]*n.size[m]
	}
	for l, s := range p.Slopes {
		n.grad[n.m+l] -= ridgeMu * s.Mu
		n.hess[(n.m+l)*dim+n.m+l] += ridgeMu
	}
	for c, b := range p.B {
		n.grad[f+c] -= ridgeB * b
		n.hess[(f+c)*dim+f+c] += ridgeB
	}
	fixed := make([]bool, dim)
	for m, a := range p.A {
		fixed[m] = a == 0 && n.grad[m] <= 0
	}
	delta := n.solve(fixed)
	for m := range p.A {
		if !fixed[m] && p.A[m]+delta[m] < 0 {
			fixed[m] = true
			// Move to the bound as a given change and let the others answer to it.
			n.shift(m, -p.A[m])
			p.A[m] = 0
			delta = n.solve(fixed)
		}
	}
	n.apply(p, delta)
}

// shift takes the effect of a fixed change of parameter j into the gradient.
func (n *newton) shift(j int, by float64) {
	dim := n.m + n.l + n.k
	for i := range dim {
		h := n.hess[min(i, j)*dim+max(i, j)]
		n.grad[i] -= h * by
	}
}

func (n *newton) solve(fixed []bool) []float64 {
	dim := n.m + n.l + n.k
	var at []int
	for i := range dim {
		if !fixed[i] {
			at = append(at, i)
		}
	}
	h := mat.NewSymDense(len(at), nil)
	g := mat.NewVecDense(len(at), nil)
	for i, a := range at {
		g.SetVec(i, n.grad[a])
		for j := i; j < len(at); j++ {
			h.SetSym(i, j, n.hess[a*dim+at[j]])
		}
		h.SetSym(i, i, h.At(i, i)*(1+1e-9)+1e-9)
	}
	out := make([]float64, dim)
	var chol mat.Cholesky
	var x mat.VecDense
	if !chol.Factorize(h) || chol.SolveVecTo(&x, g) != nil {
		return out
	}
	for i, a := range at {
		out[a] = x.AtVec(i)
	}
	return out
}

func (n *newton) apply(p *Params, delta []float64) {
	f := n.m + n.l
	top := 0.1
	for _, a := range p.A {
		top = max(top, a)
	}
	scale := 1.0
	for m := range p.A {
		scale = min(scale, 0.5*top/max(math.Abs(delta[m]), 1e-12))
	}
	for c := range p.B {
		scale = min(scale, 1/max(math.Abs(delta[f+c]), 1e-12))
	}
	for m := range p.A {
		p.A[m] = max(0, p.A[m]+scale*delta[m])
	}
	for l := range p.Slopes {
		p.Slopes[l].Mu = min(max(p.Slopes[l].Mu+scale*delta[n.m+l], -1), 0.49)
	}
	for c := range p.B {
		p.B[c] += scale * delta[f+c]
	}
}
