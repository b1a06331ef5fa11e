package noise

import (
	"math"
	"math/rand/v2"
)

// plant describes rows whose class scores are the true log-odds of their classes and whose labels are flipped.
type plant struct {
	rows    int
	spread  float64   // standard deviation of the scores
	flip    []float64 // k·k: P(observed = j | true = i)
	sources []float64 // factor on the flips of each source; nil: no sources
	seed    uint64
}

func (p plant) draw() (d *Data, truth []int32) {
	k := int(math.Sqrt(float64(len(p.flip))))
	rng := rand.New(rand.NewPCG(p.seed, 1))
	scores := make([]float64, 0, p.rows*k)
	d = &Data{Classes: k, Sources: len(p.sources), Workers: 1}
	for range p.rows {
		prob, sum := make([]float64, k), 0.0
		for c := range k {
			s := rng.NormFloat64() * p.spread
			scores = append(scores, s)
			prob[c] = math.Exp(s)
			sum += prob[c]
		}
		y := pick(prob, sum*rng.Float64())
		factor := 1.0
		if p.sources != nil {
			s := rng.IntN(len(p.sources))
			d.Source = append(d.Source, int32(s))
			factor = p.sources[s]
		}
		seen := make([]float64, k)
		for c := range k {
			if c != y {
				seen[c] = factor * p.flip[y*k+c]
				seen[y] -= seen[c]
			}
		}
		seen[y]++
		truth = append(truth, int32(y))
		d.Observed = append(d.Observed, int32(pick(seen, rng.Float64())))
	}
	d.Members = [][]float64{scores}
	return d, truth
}

func pick(weight []float64, u float64) int {
	for c, w := range weight {
		if u -= w; u < 0 {
			return c
		}
	}
	return len(weight) - 1
}

// judged are the layer's judgements of all rows.
func judged(d *Data, l *Layer) []Judgement {
	j, out := l.NewJudge(), make([]Judgement, d.Rows())
	for i := range out {
		out[i] = j.Row(d.Members, i, int(d.Observed[i]), d.source(i))
	}
	return out
}

func wrongShare(d *Data, truth []int32) float64 {
	n := 0.0
	for i, o := range d.Observed {
		if o != truth[i] {
			n++
		}
	}
	return n / float64(d.Rows())
}
