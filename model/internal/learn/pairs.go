package learn

import (
	"cmp"
	"slices"
)

// mostWeights is the most weights that leaves may have in one scorer, 8 bytes each: some 100 pairs of classes of 20,000
// rows. Above it the forests' votes, numbers and kernel features do without them.
const mostWeights = 16 << 20

// ChooseLeaves tells d whether there is memory for designs with leaves, of which a forest has so many.
func ChooseLeaves(d *Data, leaves int) { d.Leafless = len(d.Pairs)*leaves > mostWeights }

// With more than manyClasses classes, each is told apart only from the nearPairs classes it is most often taken for.
const (
	manyClasses = 12
	nearPairs   = 8
)

// ChoosePairs sets d.Pairs: all pairs, or, of many classes, those that scores confuse. scores holds the class scores,
// centred logarithms of shares, of all rows out of fold: N·Classes.
func ChoosePairs(d *Data, scores []float64) {
	k := d.Classes
	d.Pairs = nil
	near := make([][]bool, k)
	for c := range near {
		near[c] = make([]bool, k)
	}
	if k > manyClasses {
		markNear(d, scores, near)
	}
	for a := range k {
		for b := a + 1; b < k; b++ {
			if k <= manyClasses || near[a][b] || near[b][a] {
				d.Pairs = append(d.Pairs, [2]int{a, b})
			}
		}
	}
}

// markNear sets near[a][b] for the nearPairs classes b with the highest mean score over the rows labelled a.
func markNear(d *Data, scores []float64, near [][]bool) {
	k := d.Classes
	sum := make([][]float64, k)
	order := make([]int, k)
	for a := range sum {
		sum[a] = make([]float64, k)
		order[a] = a
	}
	for i, a := range d.Labels {
		for b, v := range scores[i*k : (i+1)*k] {
			sum[a][b] += v
		}
	}
	for a := range near {
		byScore := slices.Clone(order)
		slices.SortStableFunc(byScore, func(x, y int) int { return cmp.Compare(sum[a][y], sum[a][x]) })
		left := nearPairs
		for _, b := range byScore {
			if b != a && left > 0 {
				near[a][b] = true
				left--
			}
		}
	}
}
