package encode

import (
	"math"
	"math/bits"
)

// lookup finds a number's bin and its segment of the rank transform in a fixed count of steps without branches: the
// processor then has several rows under way at once. It is derived from a Number and not saved.
type lookup struct {
	edges    [maxBins - 1]uint64 // keys of the edges, then the highest key
	first    [maxBins]int32      // by bin: knots at or below the edge before it
	keys     []uint64            // of the knots, then the highest key
	steps    int                 // halvings that find a value among the knots of one bin
	segments []segment           // i: between knots i−1 and i; the last: above them
}

// segment is a piece of the rank transform: normal + slope·(v − at).
type segment struct{ at, normal, slope float64 }

// key maps numbers to integers of the same order. v is not NaN.
func key(v float64) uint64 {
	b := math.Float64bits(v + 0) // −0 becomes 0
	return b ^ (uint64(int64(b)>>63) | 1<<63)
}

// less is 1 if a < b, else 0.
func less(a, b uint64) int {
	_, borrow := bits.Sub64(a, b, 0)
	return int(borrow)
}

// newLookup derives the lookup of u.
func newLookup(u *Number) *lookup {
	l := &lookup{segments: make([]segment, len(u.Knots)+1)}
	for i := range l.edges {
		l.edges[i] = math.MaxUint64
		if i < len(u.Edges) {
			l.edges[i] = key(u.Edges[i])
		}
	}
	l.findKnots(u)
	for i := range l.segments {
		l.segments[i] = u.segment(i)
	}
	return l
}

// findKnots fills first, steps and keys.
func (l *lookup) findKnots(u *Number) {
	at, most := 0, 0
	for b := range l.first {
		l.first[b] = int32(at)
		from := at
		for at < len(u.Knots) && (b == len(u.Edges) || u.Knots[at] <= u.Edges[min(b, len(u.Edges)-1)]) {
			at++
		}
		most = max(most, at-from)
		if b == len(u.Edges) {
			break
		}
	}
	l.steps = bits.Len(uint(most))
	for _, v := range u.Knots {
		l.keys = append(l.keys, key(v))
	}
	for range 1 << l.steps {
		l.keys = append(l.keys, math.MaxUint64)
	}
}

// segment is the straight piece above knot i−1 up to knot i, flat outside the knots.
func (u *Number) segment(i int) segment {
	n := len(u.Knots)
	if n == 0 {
		return segment{}
	}
	flat := segment{normal: u.Normal[min(i, n-1)]}
	if i == 0 || i == n {
		return flat
	}
	gap := u.Knots[i] - u.Knots[i-1]
	slope := (u.Normal[i] - u.Normal[i-1]) / gap
	if math.IsInf(gap, 0) || math.IsInf(slope, 0) {
		return flat // knots too far apart, or too near, for a slope
	}
	// The upper knot is the anchor, so that its own value is exact.
	return segment{at: u.Knots[i], normal: u.Normal[i], slope: slope}
}

// find gives the bin of v and its rank-Gauss value, linear between knots.
func (l *lookup) find(v float64) (bin int, normal float64) {
	k := key(v)
	for half := maxBins / 2; half > 0; half >>= 1 {
		bin += half & -less(l.edges[bin+half-1], k)
	}
	at := int(l.first[bin])
	for half := 1 << l.steps >> 1; half > 0; half >>= 1 {
		at += half & -less(l.keys[at+half-1], k)
	}
	s := &l.segments[at]
	return bin, s.normal + s.slope*(v-s.at)
}
