package encode

import (
	"slices"

	"gonum.org/v1/gonum/stat/distuv"
)

// Number is the rank-Gauss transform of one number and its bins.
type Number struct {
	Knots   []float64 // ascending distinct values
	Normal  []float64 // normal quantile of each knot's mid-rank
	Edges   []float64 // bin k holds x ≤ Edges[k]; above the last: bin len(Edges)
	Missing bool      // some rows lack a value: one more dense column and one more bin column mark them
	Filler  float64   // median, which stands for a missing value

	find *lookup
}

// fit fits u to number at of the listed rows, which have size numbers each.
func (u *Number) fit(values []float64, at, size int, rows []int32) {
	sorted := make([]float64, 0, len(rows))
	for _, i := range rows {
		if v := values[int(i)*size+at]; v == v {
			sorted = append(sorted, v)
		}
	}
	u.Missing = len(sorted) < len(rows)
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
		edge := sorted[i-1]/2 + sorted[i]/2 // in halves, so that it cannot overflow
		if len(u.Edges) == 0 || edge > u.Edges[len(u.Edges)-1] {
			u.Edges = append(u.Edges, edge)
		}
	}
}
