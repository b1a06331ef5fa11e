package encode

import (
	"cmp"
	"fmt"
	"slices"
)

// Check tells whether loaded parts are such that Block can run on any row, and derives what is not saved. Numbers must
// be finite already.
func (e *Encoder) Check() error {
	for i := range e.Parts {
		p := &e.Parts[i]
		for j := range p.Numbers {
			u := &p.Numbers[j]
			if !rising(u.Knots) || !rising(u.Edges) || len(u.Edges) >= maxBins || len(u.Normal) != len(u.Knots) {
				return fmt.Errorf("column %d, number %d: %d knots and %d edges, or they do not rise", i, j, len(u.Knots), len(u.Edges))
			}
		}
		levels := slices.Clone(p.Levels)
		slices.Sort(levels)
		if !rising(levels) {
			return fmt.Errorf("column %d: a level stands there twice", i)
		}
	}
	e.prepare()
	return nil
}

// rising tells whether values are sorted and distinct.
func rising[T cmp.Ordered](v []T) bool {
	for i := 1; i < len(v); i++ {
		if !(v[i-1] < v[i]) {
			return false
		}
	}
	return true
}
