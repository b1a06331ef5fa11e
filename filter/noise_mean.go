package filter

import (
	"math"
	"slices"

	"labelweir/model"
)

func notANumber() Number { return Number(math.NaN()) }

// noiseOf gives what one snapshot found.
func noiseOf(f *model.Facts) *Noise {
	m := newNoiseMean()
	m.add(f, 1)
	return m.mean()
}

// rateMean is a running mean of estimates: Value, Low and High each, by weight. Overlapping windows make the
// estimates depend on each other, so the ends of the intervals are averaged, not narrowed.
type rateMean struct {
	value, low, high, weight float64
	rows                     int
}

func (m *rateMean) add(e model.Estimate, weight float64) {
	if math.IsNaN(e.Value) {
		return
	}
	m.value += weight * e.Value
	m.low += weight * e.Low
	m.high += weight * e.High
	m.weight += weight
	m.rows = max(m.rows, e.Rows)
}

func (m *rateMean) mean() Rate {
	if m.weight == 0 {
		return Rate{Value: notANumber(), Low: notANumber(), High: notANumber()}
	}
	return Rate{Value: Number(m.value / m.weight), Low: Number(m.low / m.weight), High: Number(m.high / m.weight), Rows: m.rows}
}

// noiseMean is the mean of what several snapshots found. Classes and sources are matched by name; one that a snapshot
// does not know, or can't tell from overlap, takes nothing from it.
type noiseMean struct {
	share            rateMean
	classes, sources map[string]*rateMean
	flips            map[[2]string]*rateMean // true, observed
	clear, unclear   map[string]float64      // weight of the snapshots by class
	model            string
}

func newNoiseMean() noiseMean {
	return noiseMean{classes: map[string]*rateMean{}, sources: map[string]*rateMean{}, flips: map[[2]string]*rateMean{},
		clear: map[string]float64{}, unclear: map[string]float64{}}
}

// add takes in one snapshot's facts.
func (m *noiseMean) add(f *model.Facts, weight float64) {
	n := &f.Noise
	m.model = n.Model
	m.share.add(n.Share, weight)
	for i, e := range n.BySource {
		if i < len(f.Sources) {
			at(m.sources, f.Sources[i]).add(e, weight)
		}
	}
	for i, class := range f.Classes {
		own := at(m.classes, class)
		if slices.Contains(n.Unclear, class) {
			m.unclear[class] += weight
			continue
		}
		m.clear[class] += weight
		if i < len(n.ByClass) {
			own.add(n.ByClass[i], weight)
		}
		if i < len(n.Flip) {
			for j, e := range n.Flip[i] {
				at(m.flips, [2]string{class, f.Classes[j]}).add(e, weight)
			}
		}
	}
}

// at gives the entry of m for k, a new one if there is none.
func at[K comparable](m map[K]*rateMean, k K) *rateMean {
	r := m[k]
	if r == nil {
		r = new(rateMean)
		m[k] = r
	}
	return r
}

// mean gives the mean, nil when nothing was added. A class is unclear when it was to the snapshots of at least half
// the weight.
func (m *noiseMean) mean() *Noise {
	if m.share.weight == 0 && len(m.classes) == 0 {
		return nil
	}
	n := &Noise{Share: m.share.mean(), Classes: named(m.classes), Sources: named(m.sources), Flip: [][]Rate{},
		Model: m.model, Unclear: []string{}}
	for _, from := range n.Classes {
		row := make([]Rate, len(n.Classes))
		for j, to := range n.Classes {
			row[j] = at(m.flips, [2]string{from.Name, to.Name}).mean()
		}
		n.Flip = append(n.Flip, row)
		if u := m.unclear[from.Name]; u > 0 && u >= m.clear[from.Name] {
			n.Unclear = append(n.Unclear, from.Name)
		}
	}
	return n
}

// named lists the means by name.
func named(m map[string]*rateMean) []Named {
	list := []Named{}
	for name, r := range m {
		list = append(list, Named{Name: name, Rate: r.mean()})
	}
	slices.SortFunc(list, func(a, b Named) int {
		if a.Name < b.Name {
			return -1
		}
		return 1
	})
	return list
}
