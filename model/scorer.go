package model

import (
	"fmt"
	"math"
	"slices"

	"labelweir/model/internal/encode"
	"labelweir/model/internal/fresh"
	"labelweir/model/internal/noise"
)

// Scorer judges rows that the snapshot was not trained on. It owns scratch memory and belongs to one goroutine.
type Scorer struct {
	s      *Snapshot
	cols   []encode.Input // by field, of the table at hand
	column []int          // table column of each field
	class  []int32        // table class → snapshot class, −1 for one not learned
	source []int32        // table source → snapshot source, −1 likewise
	rows   []int32        // rows of the block at hand
	block  *fresh.Scratch
	judge  *noise.Judge
}

// NewScorer returns a scorer of s.
func (s *Snapshot) NewScorer() *Scorer {
	return &Scorer{s: s, cols: make([]encode.Input, len(s.fields)), column: make([]int, len(s.fields)),
		rows: make([]int32, 0, s.machine.Rows()), block: s.machine.NewScratch(), judge: s.layer.NewJudge()}
}

// Score writes into dst[i−lo] what the snapshot says of rows lo ≤ i < hi of t; len(dst) = hi−lo. Columns are matched
// by name; classes and levels the snapshot never met are NewClass and rare values. What it says of a row does not
// depend on the rows beside it, but many rows at once are judged faster. It allocates nothing once it has met the
// table's classes and levels. The error wraps ErrSchema.
func (sc *Scorer) Score(t *Table, lo, hi int, dst []Score) error {
	if err := sc.bind(t); err != nil {
		return err
	}
	for i := lo; i < hi; i++ {
		if r := sc.reason(t, i); r != Scored {
			dst[i-lo] = Score{P: math.NaN(), Margin: math.NaN(), Implied: -1, Reason: r}
			continue
		}
		sc.rows = append(sc.rows, int32(i))
		if len(sc.rows) == cap(sc.rows) {
			sc.flush(t, lo, dst)
		}
	}
	sc.flush(t, lo, dst)
	for k := range sc.cols {
		sc.cols[k].Values, sc.cols[k].Codes = nil, nil // they are the caller's
	}
	return nil
}

// reason says why row i is not judged.
func (sc *Scorer) reason(t *Table, i int) Reason {
	switch label := t.Labels[i]; {
	case label < 0:
		return NoLabel
	case sc.class[label] < 0:
		return NewClass
	}
	for _, k := range sc.column {
		if !t.Columns[k].finite(i) {
			return NotFinite
		}
	}
	return Scored
}

// flush judges the gathered rows.
func (sc *Scorer) flush(t *Table, lo int, dst []Score) {
	sc.s.encoder.Block(sc.cols, sc.rows, sc.block.X, sc.block.Bins)
	sc.s.machine.Score(sc.block, len(sc.rows))
	for r, i := range sc.rows {
		src := -1
		if t.Sources != nil && t.Sources[i] >= 0 {
			src = int(sc.source[t.Sources[i]])
		}
		v := sc.judge.Row(sc.block.Members, r, int(sc.class[t.Labels[i]]), src)
		dst[int(i)-lo] = Score{P: v.Wrong, Margin: v.Margin, Implied: int32(v.Implied)}
	}
	sc.rows = sc.rows[:0]
}

// bind finds the fields among the table's columns and brings the translations of its codes up to date; lists only grow,
// so old entries stay right.
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
		if is := c.field(); is != *f {
			return fmt.Errorf("%w: column %q is %v of %d, was %v of %d", ErrSchema, f.Name, is.Kind, is.Size, f.Kind, f.Size)
		}
		in := &sc.cols[k]
		in.Values, in.Codes = c.Values, c.Codes
		in.Slots = sc.s.encoder.Parts[k].Bind(in.Slots, c.Levels)
	}
	sc.class = translate(sc.class, t.Classes, sc.s.facts.Classes)
	sc.source = translate(sc.source, t.SourceNames, sc.s.facts.Sources)
	return nil
}

// translate extends to, which maps indexes into names to indexes into known, −1 for the others, by the names it does
// not cover yet.
func translate(to []int32, names, known []string) []int32 {
	if len(to) >= len(names) {
		return to
	}
	at := make(map[string]int32, len(known))
	for i, n := range known {
		at[n] = int32(i)
	}
	for _, n := range names[len(to):] {
		i, ok := at[n]
		if !ok {
			i = -1
		}
		to = append(to, i)
	}
	return to
}
