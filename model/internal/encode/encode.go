// Package encode turns table columns into the two forms the learners read: a dense row of numbers on a common scale,
// and small whole-number bins for trees. An encoder is fitted on a window and immutable after.
package encode

import (
	"cmp"
	"math"
	"slices"

	"gonum.org/v1/gonum/stat/distuv"
)

// Input is one column as the encoder sees it.
type Input struct {
	Size   int       // numbers a row; 0 for a category
	Values []float64 // n·Size; NaN is missing
	Codes  []int32   // category codes, −1 missing
	Levels int       // number of levels
}

// Limits that bound an encoder's size.
const (
	maxBins   = 64   // bins of a number
	maxKnots  = 1024 // knots of a number's rank transform
	maxLevels = 64   // levels of a category that get a column of their own, the most frequent first
	clipRank  = 1e-3 // smallest mid-rank before the normal quantile
	minLevel  = 3    // fewest rows of such a level
)

// Encoder maps rows to Dense float32 values (the last is the constant 1) and Bins bytes.
type Encoder struct {
	Parts []Part // one a table column, in order
	Dense int    // values a dense row has, the constant included
	Bins  int    // bytes a binned row has
}

// Part encodes one table column.
type Part struct {
	Numbers []Number // one for each number of the row; nil for a category
	Slots   []int32  // category: level code → slot, −1: the shared slot of rare levels; nil for numbers
	Width   int      // category: number of slots, rare and missing included
}

// Number is the rank-Gauss transform of one number and its bins.
type Number struct {
	Knots   []float64 // ascending distinct values
	Normal  []float64 // normal quantile of each knot's mid-rank
	Edges   []float64 // bin k holds x ≤ Edges[k]; above the last: bin len(Edges)
	Missing bool      // some rows lack a value: one more dense column and one more bin column mark them
	Filler  float64   // median, which stands for a missing value
}

// Fit fits an encoder on n rows. Cost O(n log n) a number.
func Fit(cols []Input, n int) *Encoder {
	e := &Encoder{Parts: make([]Part, len(cols)), Dense: 1}
	for i := range cols {
		p := &e.Parts[i]
		if cols[i].Size == 0 {
			p.fitCategory(&cols[i])
			e.Dense += p.Width
			e.Bins += p.Width
			continue
		}
		p.Numbers = make([]Number, cols[i].Size)
		for j := range p.Numbers {
			p.Numbers[j].fit(cols[i].Values, j, cols[i].Size, n)
			w := p.Numbers[j].width()
			e.Dense += w
			e.Bins += w
		}
	}
	return e
}

func (u *Number) width() int {
	if u.Missing {
		return 2
	}
	return 1
}

func (u *Number) fit(values []float64, at, size, n int) {
	sorted := make([]float64, 0, n)
	for i := range n {
		if v := values[i*size+at]; v == v {
			sorted = append(sorted, v)
		}
	}
	u.Missing = len(sorted) < n
	if len(sorted) == 0 {
		return
	}
	slices.Sort(sorted)
	u.Filler = sorted[len(sorted)/2]
	u.fitKnots(sorted)
	u.fitEdges(sorted)
}

// fitKnots keeps at most maxKnots of the distinct values, evenly by rank, each with its mid-rank's normal quantile.
func (u *Number) fitKnots(sorted []float64) {
	n := float64(len(sorted))
	step := max(1, len(sorted)/maxKnots)
	last := -step
	for lo := 0; lo < len(sorted); {
		hi := lo + 1
		for hi < len(sorted) && sorted[hi] == sorted[lo] {
			hi++
		}
		if lo-last >= step || hi == len(sorted) || hi-lo >= step {
			rank := float64(lo+hi) / 2 / n
			rank = min(max(rank, clipRank), 1-clipRank)
			u.Knots = append(u.Knots, sorted[lo])
			u.Normal = append(u.Normal, distuv.UnitNormal.Quantile(rank))
			last = lo
		}
		lo = hi
	}
}

// fitEdges puts edges midway between values at even ranks.
func (u *Number) fitEdges(sorted []float64) {
	for k := 1; k < maxBins; k++ {
		i := k * len(sorted) / maxBins
		if i == 0 || i >= len(sorted) {
			continue
		}
		// The first change of value at or after rank i.
		for i < len(sorted) && sorted[i] == sorted[i-1] {
			i++
		}
		if i == len(sorted) {
			break
		}
		edge := sorted[i-1] + (sorted[i]-sorted[i-1])/2
		if len(u.Edges) == 0 || edge > u.Edges[len(u.Edges)-1] {
			u.Edges = append(u.Edges, edge)
		}
	}
}

// normal gives the rank-Gauss value of v, linear between knots.
func (u *Number) normal(v float64) float64 {
	if len(u.Knots) == 0 {
		return 0
	}
	i, _ := slices.BinarySearch(u.Knots, v)
	switch {
	case i == len(u.Knots):
		return u.Normal[i-1]
	case i == 0 || u.Knots[i] == v:
		return u.Normal[i]
	}
	t := (v - u.Knots[i-1]) / (u.Knots[i] - u.Knots[i-1])
	return u.Normal[i-1] + t*(u.Normal[i]-u.Normal[i-1])
}

func (u *Number) bin(v float64) uint8 {
	lo, hi := 0, len(u.Edges)
	for lo < hi {
		mid := int(uint(lo+hi) >> 1)
		if v > u.Edges[mid] {
			lo = mid + 1
		} else {
			hi = mid
		}
	}
	return uint8(lo)
}

func (p *Part) fitCategory(in *Input) {
	counts := make([]int, in.Levels)
	for _, c := range in.Codes {
		if c >= 0 {
			counts[c]++
		}
	}
	order := make([]int, in.Levels)
	for i := range order {
		order[i] = i
	}
	slices.SortStableFunc(order, func(a, b int) int { return cmp.Compare(counts[b], counts[a]) })
	p.Slots = make([]int32, in.Levels)
	for i := range p.Slots {
		p.Slots[i] = -1
	}
	for i, c := range order {
		if i == maxLevels || counts[c] < minLevel {
			break
		}
		p.Slots[c] = int32(p.Width)
		p.Width++
	}
	p.Width += 2 // rare, missing
}

// slot gives the column of a code: its own, that of rare levels, or that of missing ones.
func (p *Part) slot(code int32) int {
	if code < 0 {
		return p.Width - 1
	}
	if int(code) < len(p.Slots) && p.Slots[code] >= 0 {
		return int(p.Slots[code])
	}
	return p.Width - 2
}

// Row writes row i of the columns into dense (len e.Dense, scaled by scale/√(dense columns), the last the constant 1)
// and bins (len e.Bins). Either may be nil.
func (e *Encoder) Row(cols []Input, i int, scale float32, dense []float32, bins []uint8) {
	at := 0
	if dense != nil {
		clear(dense)
		dense[e.Dense-1] = 1
		scale /= float32(math.Sqrt(float64(len(e.Parts))))
	}
	if bins != nil {
		clear(bins)
	}
	for k := range e.Parts {
		p := &e.Parts[k]
		if p.Numbers == nil {
			s := at + p.slot(cols[k].Codes[i])
			if dense != nil {
				dense[s] = scale
			}
			if bins != nil {
				bins[s] = 1
			}
			at += p.Width
			continue
		}
		per := scale / float32(math.Sqrt(float64(len(p.Numbers))))
		if len(p.Numbers) == 1 {
			per = scale
		}
		for j := range p.Numbers {
			u := &p.Numbers[j]
			v := cols[k].Values[i*len(p.Numbers)+j]
			missing := v != v
			if missing {
				v = u.Filler
			}
			if dense != nil {
				dense[at] = per * float32(u.normal(v))
			}
			if bins != nil {
				bins[at] = u.bin(v)
			}
			if u.Missing {
				if missing {
					if dense != nil {
						dense[at+1] = per
					}
					if bins != nil {
						bins[at+1] = 1
					}
				}
				at++
			}
			at++
		}
	}
}
