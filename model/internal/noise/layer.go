package noise

import (
	"math"
	"sort"
)

// Layer is the evidence-weighted average of noise models. It is immutable once fitted.
type Layer struct {
	Classes int
	Models  []Model
	Steps   []Step // monotone boundary share by logit gap of the best other class over the observed one
}

// Model is one noise model with its weight in the average.
type Model struct {
	Name   string
	Weight float64
	P      Params
	shape  shape // lost when the layer is saved: only a trainer refits
}

// Step says that from gap At on the boundary share is Share.
type Step struct{ At, Share float64 }

// Limits of the average.
const (
	forgetNats = 8 // a model this much behind the best has no weight
	tieShare   = 0.02
)

// Fit fits a layer and returns it with the candidates' facts.
func Fit(d *Data) (*Layer, *Facts) {
	if few := d.thin(searchRows); few != d {
		return Refit(d, average(d.Classes, search(few)))
	}
	all := search(d)
	l := average(d.Classes, all)
	l.fitSteps(d)
	return l, newFacts(d, l, all)
}

// search fits every model there is.
func search(d *Data) []*candidate {
	all := family(d, start(d), "")
	one := all[1]
	for _, c := range all {
		if c.shape.flips == single {
			one = c
		}
	}
	more := extend(d, all)
	if p := slopes(d, one); p != nil {
		second := family(d, p, "slopes+")
		more = append(more, second...)
		more = append(more, extend(d, second)...)
	}
	return append(all, more...)
}

// average weighs the candidates by their evidence.
func average(k int, all []*candidate) *Layer {
	best := math.Inf(-1)
	for _, c := range all {
		if !c.refused {
			best = max(best, c.evidence)
		}
	}
	l := &Layer{Classes: k}
	sum := 0.0
	for _, c := range all {
		if c.refused || c.evidence < best-forgetNats {
			continue
		}
		w := math.Exp(c.evidence - best)
		sum += w
		l.Models = append(l.Models, Model{Name: c.name, Weight: w, P: *c.p, shape: c.shape})
	}
	for i := range l.Models {
		l.Models[i].Weight /= sum
	}
	sort.SliceStable(l.Models, func(a, b int) bool { return l.Models[a].Weight > l.Models[b].Weight })
	return l
}

// Judgement is what the layer says of one row.
type Judgement struct {
	Wrong   float64 // probability that the observed label is wrong
	Implied int     // most probable true class
	Margin  float64 // log-odds of the observed class against the best other, before any noise
}

// Judge is scratch for judging rows; it belongs to one goroutine.
type Judge struct {
	l     *Layer
	r     *row
	prob  []float64
	post  []float64
	back  float64
	bound float64
}

// NewJudge returns scratch for l.
func (l *Layer) NewJudge() *Judge {
	return &Judge{l: l, r: newRow(l.Classes), prob: make([]float64, l.Classes), post: make([]float64, l.Classes)}
}

// mix averages the models' inference on row i.
func (j *Judge) mix(members [][]float64, i, o, src int) {
	clear(j.prob)
	clear(j.post)
	j.back, j.bound = 0, 0
	for m := range j.l.Models {
		w, p := j.l.Models[m].Weight, &j.l.Models[m].P
		if p.Rho != nil && src >= len(p.Rho) {
			src = -1
		}
		p.logits(j.r, members, i)
		p.infer(j.r, o, src)
		j.back += w * j.r.back
		j.bound += w * j.r.q
		for c := range j.prob {
			j.prob[c] += w * j.r.prob[c]
			j.post[c] += w * j.r.post[c]
		}
	}
}

// gap is the log-odds of the observed class against the best other.
func (j *Judge) gap(o int) float64 {
	other := 0.0
	for c, p := range j.prob {
		if c != o {
			other = max(other, p)
		}
	}
	return math.Log(max(j.prob[o], 1e-12)) - math.Log(max(other, 1e-12))
}

// Row judges row i with observed class o and source src (−1: none).
func (j *Judge) Row(members [][]float64, i, o, src int) Judgement {
	j.mix(members, i, o, src)
	gap := j.gap(o)
	p := j.back + j.l.boundaryShare(-gap)
	u := 1 - j.prob[o]
	p = min(max(p, 0), 1)
	p = 1 - (1-p)*(1-tieShare*u)
	implied := 0
	for c, v := range j.post {
		if v > j.post[implied] {
			implied = c
		}
	}
	return Judgement{Wrong: p, Implied: implied, Margin: gap}
}

// boundaryShare looks the monotone share up.
func (l *Layer) boundaryShare(at float64) float64 {
	i := sort.Search(len(l.Steps), func(i int) bool { return l.Steps[i].At > at })
	if i == 0 {
		if len(l.Steps) == 0 {
			return 0
		}
		return l.Steps[0].Share
	}
	return l.Steps[i-1].Share
}

// fitSteps makes the boundary share a rising function of the gap by pooling adjacent violators (Ayer et al. 1955).
func (l *Layer) fitSteps(d *Data) {
	used := false
	for _, m := range l.Models {
		used = used || m.P.Gamma > 0
	}
	if !used {
		return
	}
	n := d.Rows()
	at, share := make([]float64, n), make([]float64, n)
	j := l.NewJudge()
	for i := range n {
		src := -1
		if d.Source != nil {
			src = int(d.Source[i])
		}
		o := int(d.Observed[i])
		j.mix(d.Members, i, o, src)
		at[i], share[i] = -j.gap(o), j.bound
	}
	l.Steps = pool(at, share)
}

// pool is the isotonic regression of share on at, as steps.
func pool(at, share []float64) []Step {
	order := make([]int, len(at))
	for i := range order {
		order[i] = i
	}
	sort.SliceStable(order, func(a, b int) bool { return at[order[a]] < at[order[b]] })
	type block struct {
		at, sum float64
		n       int
	}
	var blocks []block
	for _, i := range order {
		blocks = append(blocks, block{at[i], share[i], 1})
		for len(blocks) > 1 {
			a, b := &blocks[len(blocks)-2], blocks[len(blocks)-1]
			if a.sum*float64(b.n) < b.sum*float64(a.n) {
				break
			}
			a.sum += b.sum
			a.n += b.n
			blocks = blocks[:len(blocks)-1]
		}
	}
	steps := make([]Step, len(blocks))
	for i, b := range blocks {
		steps[i] = Step{At: b.at, Share: b.sum / float64(b.n)}
	}
	return steps
}
