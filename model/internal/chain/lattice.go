package chain

import (
	"math"
	"math/rand/v2"

	"labelweir/model/internal/loss"
)

// lattice holds a problem by columns, with weights that are fixed-point numbers: a code c of so many bits stands for
// (c − 2^(bits−1))·step, step = range/2^(bits−1), so that zero is a code and one flipped bit is one move. Rows are the
// packed rows of a Scratch. Its zero value is ready for build.
type lattice struct {
	n, dense  int
	value     float64 // of a leaf
	q, lambda float64
	bits      int
	step      float64

	x      []float32 // dense×n, column-major, times y
	y      []float64
	omega  []float64
	starts []int32 // columns+1−dense offsets into rows, the leaf columns' row lists
	rows   []int32
	used   []int32 // columns that some row has

	code   []int32 // one a column
	margin []float64
	cost   []float64 // ωL_q(margin)
	trial  []float64 // margins of a proposed move, by position in the column's row list
	j      float64
	best   []int32
	bestJ  float64
}

// build takes the rows packed in s by columns, for weights of the given bits within ±radius.
func (l *lattice) build(s *Scratch, q, radius float64, bits int) {
	cols := len(s.w)
	l.n, l.dense, l.value, l.q, l.lambda = s.n, s.dense, s.value, q, s.lambda
	l.bits, l.step = bits, radius/float64(int(1)<<(bits-1))
	l.y, l.omega = s.y, s.omega
	l.x = resize(l.x, l.dense*l.n)
	for i := range l.n {
		for c, v := range s.number(i) {
			l.x[c*l.n+i] = v * float32(s.y[i])
		}
	}
	l.index(s, cols)
	l.code, l.best = resize(l.code, cols), resize(l.best, cols)
	l.margin, l.cost, l.trial = resize(l.margin, l.n), resize(l.cost, l.n), resize(l.trial, l.n)
}

// index lists the rows of every leaf column and the columns that have any.
func (l *lattice) index(s *Scratch, cols int) {
	leafCols := cols - l.dense
	l.starts = resize(l.starts, leafCols+1)
	l.rows = resize(l.rows, s.n*s.trees)
	clear(l.starts)
	for i := range l.n {
		for t := range s.trees {
			l.starts[s.leaf(i, t)-l.dense+1]++
		}
	}
	for c := range leafCols {
		l.starts[c+1] += l.starts[c]
	}
	l.used = l.used[:0]
	for c := range l.dense {
		l.used = append(l.used, int32(c))
	}
	for c := range leafCols {
		if l.starts[c+1] > l.starts[c] {
			l.used = append(l.used, int32(l.dense+c))
		}
	}
	for i := range l.n {
		for t := range s.trees {
			at := &l.starts[s.leaf(i, t)-l.dense]
			l.rows[*at] = int32(i)
			*at++
		}
	}
	copy(l.starts[1:], l.starts[:leafCols])
	l.starts[0] = 0
}

// weight is what a code stands for.
func (l *lattice) weight(code int32) float64 { return float64(code-1<<(l.bits-1)) * l.step }

// place rounds w to the nearest codes and brings margins and J up to date.
func (l *lattice) place(w []float64) {
	half := float64(int(1) << (l.bits - 1))
	for c, v := range w {
		l.code[c] = int32(math.Max(0, math.Min(2*half-1, math.Round(v/l.step)+half)))
	}
	l.measure()
	l.mark()
}

// mark makes the present codes the best ones.
func (l *lattice) mark() {
	copy(l.best, l.code)
	l.bestJ = l.j
}

// measure computes margins, costs and J from the codes.
func (l *lattice) measure() {
	clear(l.margin)
	l.j = 0
	for _, c := range l.used {
		w := l.weight(l.code[c])
		l.j += l.lambda * w * w
		if w == 0 {
			continue
		}
		if int(c) < l.dense {
			for i, v := range l.x[int(c)*l.n : (int(c)+1)*l.n] {
				l.margin[i] += w * float64(v)
			}
			continue
		}
		for _, i := range l.leaf(int(c)) {
			l.margin[i] += w * l.value * l.y[i]
		}
	}
	for i, m := range l.margin {
		l.cost[i] = l.omega[i] * loss.Value(l.q, m)
		l.j += l.cost[i]
	}
}

// leaf is the row list of a leaf column.
func (l *lattice) leaf(c int) []int32 { return l.rows[l.starts[c-l.dense]:l.starts[c-l.dense+1]] }

// try proposes a new code for column c and takes it when J falls or, at temperature t, with chance exp(−ΔJ/t)
// (Metropolis et al. 1953). It tells whether it took it. Cost O(rows of the column).
func (l *lattice) try(c int, code int32, t float64, rng *rand.Rand) bool {
	was, w := l.weight(l.code[c]), l.weight(code)
	delta := l.lambda * (w*w - was*was)
	if c < l.dense {
		delta += l.tryDense(c, w-was)
	} else {
		delta += l.tryLeaf(c, w-was)
	}
	if delta > 0 && (t == 0 || rng.Float64() >= math.Exp(-delta/t)) {
		return false
	}
	l.take(c)
	l.code[c] = code
	l.j += delta
	return true
}

// tryDense puts the margins after a change of a dense weight by d in trial and returns the change of the loss.
func (l *lattice) tryDense(c int, d float64) (delta float64) {
	top := loss.Ceiling(l.q)
	trial, margin := l.trial[:l.n], l.margin[:l.n]
	cost, omega := l.cost[:l.n], l.omega[:l.n]
	for i, v := range l.x[c*l.n : (c+1)*l.n] {
		m := margin[i] + d*float64(v)
		trial[i] = m
		h := max(0, 1-m)
		delta += omega[i]*min(top, h*h) - cost[i]
	}
	return delta
}

// tryLeaf is tryDense for a leaf's weight; trial is by position in the leaf's row list.
func (l *lattice) tryLeaf(c int, d float64) (delta float64) {
	top := loss.Ceiling(l.q)
	d *= l.value
	for k, i := range l.leaf(c) {
		m := l.margin[i] + d*l.y[i]
		l.trial[k] = m
		h := max(0, 1-m)
		delta += l.omega[i]*min(top, h*h) - l.cost[i]
	}
	return delta
}

// take makes the margins in trial those of column c's rows.
func (l *lattice) take(c int) {
	top := loss.Ceiling(l.q)
	if c < l.dense {
		for i, m := range l.trial[:l.n] {
			h := max(0, 1-m)
			l.margin[i], l.cost[i] = m, l.omega[i]*min(top, h*h)
		}
		return
	}
	for k, i := range l.leaf(c) {
		m := l.trial[k]
		h := max(0, 1-m)
		l.margin[i], l.cost[i] = m, l.omega[i]*min(top, h*h)
	}
}
