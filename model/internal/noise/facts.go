package noise

import "math"

// Interval is a value with an approximate 90 % interval.
type Interval struct{ Value, Low, High float64 }

// Facts are the layer's findings on the rows it was fitted on.
type Facts struct {
	Names    []string // every model tried
	Evidence []float64
	Refused  []bool
	Share    Interval   // wrong labels among all rows
	ByClass  []Interval // among the rows of that observed class
	BySource []Interval
	Flip     []Interval // k·k
	Unclear  []int      // classes that a refused model, well ahead of the others, says flip more often than not
}

// bandNats: models this close to the best belong to the band within which the share may lie.
const bandNats = 3

// newFacts sums the layer's posterior over the rows.
func newFacts(d *Data, l *Layer, all []*candidate) *Facts {
	k := d.Classes
	f := &Facts{}
	best, bestRefused := math.Inf(-1), math.Inf(-1)
	for _, c := range all {
		f.Names = append(f.Names, c.name)
		f.Evidence = append(f.Evidence, c.evidence)
		f.Refused = append(f.Refused, c.refused)
		if c.refused {
			bestRefused = max(bestRefused, c.evidence)
		} else {
			best = max(best, c.evidence)
		}
	}
	f.unclear(k, all, best, bestRefused)
	s := newSums(d)
	j := l.NewJudge()
	for i := range d.Rows() {
		o, src := int(d.Observed[i]), d.source(i)
		p := j.Row(d.Members, i, o, src)
		s.add(o, src, p.Wrong)
		for y, v := range j.post {
			if y == o {
				v = 1 - p.Wrong
			} else if rest := 1 - j.post[o]; rest > 1e-12 {
				v *= p.Wrong / rest
			}
			s.flip[y*k+o] += v
		}
	}
	lo, hi := band(d, all, best)
	f.fill(s, lo/float64(d.Rows()), hi/float64(d.Rows()))
	return f
}

func (d *Data) source(i int) int {
	if d.Source == nil {
		return -1
	}
	return int(d.Source[i])
}

// unclear names the classes that the best refused model sees flipped more often than not, if it leads by 2 nats.
func (f *Facts) unclear(k int, all []*candidate, best, bestRefused float64) {
	if bestRefused < best+2 {
		return
	}
	for _, c := range all {
		if !c.refused || c.evidence < bestRefused {
			continue
		}
		for i := range k {
			if c.p.Flip[i*k+i] <= 0.5 {
				f.Unclear = append(f.Unclear, i)
			}
		}
		return
	}
}

// sums are expected counts of wrong labels.
type sums struct {
	k                    int
	n, wrong             float64
	classN, classWrong   []float64
	sourceN, sourceWrong []float64
	flip                 []float64
}

func newSums(d *Data) *sums {
	return &sums{k: d.Classes,
		classN: make([]float64, d.Classes), classWrong: make([]float64, d.Classes),
		sourceN: make([]float64, d.Sources), sourceWrong: make([]float64, d.Sources),
		flip: make([]float64, d.Classes*d.Classes)}
}

func (s *sums) add(o, src int, wrong float64) {
	s.n++
	s.wrong += wrong
	s.classN[o]++
	s.classWrong[o] += wrong
	if src >= 0 {
		s.sourceN[src]++
		s.sourceWrong[src] += wrong
	}
}

// band is the range of the expected number of wrong labels over the models near the best, refused ones left out.
func band(d *Data, all []*candidate, best float64) (lo, hi float64) {
	lo, hi = math.Inf(1), 0
	r := newRow(d.Classes)
	for _, c := range all {
		if c.refused || c.evidence < best-bandNats {
			continue
		}
		v := 0.0
		for i := range d.Rows() {
			c.p.logits(r, d.Members, i)
			c.p.infer(r, int(d.Observed[i]), d.source(i))
			v += 1 - r.right
		}
		lo, hi = min(lo, v), max(hi, v)
	}
	return lo, hi
}

// fill turns sums into shares. Every interval is the sampling interval (Wilson 1927, doubled half-width since plain
// ones cover too little) widened in proportion to the band of the overall share.
func (f *Facts) fill(s *sums, lo, hi float64) {
	f.Share = interval(s.wrong, s.n)
	down, up := 1.0, 1.0
	if v := f.Share.Value; v > 0 {
		down, up = min(1, lo/v), max(1, hi/v)
	}
	widen := func(x Interval) Interval {
		x.Low = max(0, min(x.Low, x.Value*down))
		x.High = min(1, max(x.High, x.Value*up))
		return x
	}
	f.Share = widen(f.Share)
	for c := range s.classN {
		f.ByClass = append(f.ByClass, widen(interval(s.classWrong[c], s.classN[c])))
	}
	for c := range s.sourceN {
		f.BySource = append(f.BySource, widen(interval(s.sourceWrong[c], s.sourceN[c])))
	}
	for i := range s.k {
		n := 0.0
		for j := range s.k {
			n += s.flip[i*s.k+j]
		}
		for j := range s.k {
			x := interval(s.flip[i*s.k+j], n)
			if i != j {
				x = widen(x)
			}
			f.Flip = append(f.Flip, x)
		}
	}
}

// z90 is the normal quantile of a two-sided 90 % interval.
const z90 = 1.6448536269514722

// interval is the Wilson interval of x in n with its half-width doubled.
func interval(x, n float64) Interval {
	if n <= 0 {
		return Interval{Value: 0, Low: 0, High: 1}
	}
	p := x / n
	z2 := z90 * z90
	mid := (p + z2/(2*n)) / (1 + z2/n)
	half := z90 / (1 + z2/n) * math.Sqrt(p*(1-p)/n+z2/(4*n*n))
	return Interval{Value: p, Low: max(0, mid-2*half), High: min(1, mid+2*half)}
}
