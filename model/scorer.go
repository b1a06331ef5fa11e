package model

import (
	"fmt"
	"math"
	"slices"

	"labelweir/model/internal/encode"
	"labelweir/model/internal/learn"
	"labelweir/model/internal/noise"
)

// Scorer judges rows that the snapshot was not trained on. It owns scratch memory and belongs to one goroutine.
type Scorer struct {
	s       *Snapshot
	cols    []encode.Input
	column  []int     // table column of each field
	levels  [][]int32 // by field: table level code → snapshot level code
	code    []int32   // by field: one translated code
	class   []int32   // table class → snapshot class
	source  []int32   // table source → snapshot source
	bins    []uint8
	input   learn.Input
	scratch []float64
	leaves  [learn.Forests][]int32
	members [][]float64
	judge   *noise.Judge
}

// NewScorer returns a scorer of s.
func (s *Snapshot) NewScorer() *Scorer {
	sc := &Scorer{s: s, judge: s.layer.NewJudge(), bins: make([]uint8, s.encoder.Bins),
		cols: make([]encode.Input, len(s.fields)), column: make([]int, len(s.fields)),
		levels: make([][]int32, len(s.fields)), code: make([]int32, len(s.fields)), members: make([][]float64, len(s.plan))}
	for i := range sc.members {
		sc.members[i] = make([]float64, len(s.facts.Classes))
	}
	sc.input.Dense = make([]float32, s.encoder.Dense)
	sc.input.Smooth = make([][]float32, len(s.kernels))
	for j, m := range s.kernels {
		if m != nil {
			sc.input.Smooth[j] = make([]float32, m.Size()+1)
			sc.input.Smooth[j][m.Size()] = 1
			sc.scratch = make([]float64, max(len(sc.scratch), m.Size()))
		}
	}
	for j, f := range s.forests {
		if f != nil {
			sc.leaves[j] = make([]int32, len(f.Trees))
		}
	}
	sc.input.Leaves = sc.leaves[learn.Cleaned]
	return sc
}

// Score writes into dst[i−lo] what the snapshot says of rows lo ≤ i < hi of t; len(dst) = hi−lo. Columns are matched
// by name; classes and levels the snapshot never met are NewClass and missing values. It allocates nothing once it has
// met the table's classes and levels. The error wraps ErrSchema.
func (sc *Scorer) Score(t *Table, lo, hi int, dst []Score) error {
	if err := sc.bind(t); err != nil {
		return err
	}
	for i := lo; i < hi; i++ {
		dst[i-lo] = sc.row(t, i)
	}
	return nil
}

func (sc *Scorer) row(t *Table, i int) Score {
	none := Score{P: math.NaN(), Margin: math.NaN(), Implied: -1}
	label := t.Labels[i]
	switch {
	case label < 0:
		none.Reason = NoLabel
		return none
	case sc.class[label] < 0:
		none.Reason = NewClass
		return none
	case !finite(t, i):
		none.Reason = NotFinite
		return none
	}
	src := -1
	if t.Sources != nil && t.Sources[i] >= 0 {
		src = int(sc.source[t.Sources[i]])
	}
	sc.encode(t, i)
	for m := range sc.s.plan {
		p := &sc.s.plan[m]
		if p.forest >= 0 {
			learn.VoteScore(sc.s.forests[p.forest], sc.leaves[p.forest], sc.members[m])
		} else {
			sc.s.linear[m].Score(&sc.input, sc.members[m])
		}
	}
	v := sc.judge.Row(sc.members, 0, int(sc.class[label]), src)
	return Score{P: v.Wrong, Margin: v.Margin, Implied: int32(v.Implied)}
}

// encode prepares row i for all members.
func (sc *Scorer) encode(t *Table, i int) {
	for k, at := range sc.column {
		c := &t.Columns[at]
		if c.Kind == Category {
			sc.code[k] = -1
			if v := c.Codes[i]; v >= 0 {
				sc.code[k] = sc.levels[k][v]
			}
			sc.cols[k].Codes = sc.code[k : k+1]
		} else {
			sc.cols[k].Values = c.Values[i*c.Size : (i+1)*c.Size]
		}
	}
	sc.s.encoder.Row(sc.cols, 0, 1, sc.input.Dense, sc.bins)
	for j, m := range sc.s.kernels {
		if m != nil {
			m.Features(sc.input.Dense, sc.input.Smooth[j][:m.Size()], sc.scratch)
		}
	}
	for j, f := range sc.s.forests {
		if f != nil {
			f.Walk(sc.bins, sc.leaves[j])
		}
	}
}

// rare is a level code no snapshot has: it falls into the slot of rare levels.
const rare = math.MaxInt32

// bind brings the translations of the table's codes up to date; lists only grow, so old entries stay right.
func (sc *Scorer) bind(t *Table) error {
	for k := range sc.s.fields {
		f := &sc.s.fields[k]
		at := sc.column[k]
		if at >= len(t.Columns) || t.Columns[at].Name != f.Name {
			at = slices.IndexFunc(t.Columns, func(c Column) bool { return c.Name == f.Name })
			if at < 0 {
				return fmt.Errorf("%w: no column %q", ErrSchema, f.Name)
			}
			sc.column[k] = at
		}
		c := &t.Columns[at]
		if c.Kind != f.Kind || c.Size != f.Size {
			return fmt.Errorf("%w: column %q is %v of %d, was %v of %d", ErrSchema, f.Name, c.Kind, c.Size, f.Kind, f.Size)
		}
		if c.Kind == Category {
			sc.levels[k] = translate(sc.levels[k], c.Levels, f.Levels, rare)
		}
	}
	sc.class = translate(sc.class, t.Classes, sc.s.facts.Classes, -1)
	sc.source = translate(sc.source, t.SourceNames, sc.s.facts.Sources, -1)
	return nil
}

// translate extends to, which maps indexes into names to indexes into known, for the names it does not cover yet.
func translate(to []int32, names, known []string, missing int32) []int32 {
	if len(to) >= len(names) {
		return to
	}
	at := make(map[string]int32, len(known))
	for i, n := range known {
		at[n] = int32(i)
	}
	for _, n := range names[len(to):] {
		if i, ok := at[n]; ok {
			to = append(to, i)
		} else {
			to = append(to, missing)
		}
	}
	return to
}
