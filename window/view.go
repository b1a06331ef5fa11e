package window

import (
	"cmp"
	"slices"

	"labelweir/model"
)

// View is a copy of the rows of a window at one moment. It belongs to whoever asked for it.
type View struct {
	Table *model.Table
	Rows  []int64 // row numbers, rising; one a row of Table

	// Stands is the number of labelled rows that the view stands for: those within the span, or with Uniform and
	// NoSpan all that arrived. Where rows were dropped within a span it is estimated from the priorities of those
	// kept, with a relative error of about 1/√rows (Beyer et al., SIGMOD 2007, the unbiased estimator of §3).
	Stands int64
}

// Index gives the place of a row number in the view, −1 when it is not there. Cost O(log rows).
func (v *View) Index(row int64) int {
	if i, ok := slices.BinarySearch(v.Rows, row); ok {
		return i
	}
	return -1
}

// View copies the rows that a fit is to see now: with Latest the last ones that arrived, with Uniform the sample. The
// window may be appended to while the view is used. Cost O(rows·columns), with Uniform O(stored·log stored) besides.
func (w *Window) View() *View {
	at, stands := w.chosen()
	t := &model.Table{
		Columns: make([]model.Column, len(w.columns)),
		Labels:  make([]int32, len(at)), Keys: make([]uint64, len(at)),
		Classes: w.classes.list, SourceNames: w.sources.list,
	}
	if w.sourced {
		t.Sources = make([]int32, len(at))
	}
	v := &View{Table: t, Rows: make([]int64, len(at)), Stands: stands}
	for i, p := range at {
		b, j := w.blocks[int(p)/w.blockRows], int(p)%w.blockRows
		v.Rows[i], t.Labels[i], t.Keys[i] = b.rows[j], b.labels[j], b.keys[j]
		if w.sourced {
			t.Sources[i] = b.sources[j]
		}
	}
	for c := range w.columns {
		t.Columns[c] = w.column(c, at)
	}
	return v
}

// column copies the values of column c at the given places.
func (w *Window) column(c int, at []int32) model.Column {
	col := w.columns[c]
	if col.Kind == model.Category {
		col.Levels = w.levels[c].list
		col.Codes = make([]int32, len(at))
		for i, p := range at {
			col.Codes[i] = w.blocks[int(p)/w.blockRows].codes[c][int(p)%w.blockRows]
		}
		return col
	}
	col.Values = make([]float64, len(at)*col.Size)
	for i, p := range at {
		b, j := w.blocks[int(p)/w.blockRows], int(p)%w.blockRows*col.Size
		copy(col.Values[i*col.Size:(i+1)*col.Size], b.values[c][j:j+col.Size])
	}
	return col
}

// chosen gives the places of the view's rows in the blocks, rising, and how many rows they stand for.
func (w *Window) chosen() ([]int32, int64) {
	if w.policy.Keep == Latest {
		at := make([]int32, w.stored)
		for i := range at {
			at[i] = int32(w.head + i)
		}
		return at, int64(w.stored)
	}
	list := w.candidates()
	slices.SortFunc(list, func(a, b candidate) int {
		if a.priority != b.priority {
			return cmp.Compare(b.priority, a.priority)
		}
		return cmp.Compare(b.row, a.row)
	})
	stands := w.stands(list)
	if len(list) > w.limit {
		list = w.draw(list)
	}
	at := make([]int32, len(list))
	for i := range list {
		at[i] = list[i].at
	}
	slices.Sort(at)
	return at, stands
}

// stands estimates how many rows are within the span, from the stored ones in falling order of priority.
func (w *Window) stands(list []candidate) int64 {
	switch k := len(list); {
	case w.policy.Span == NoSpan:
		return w.arrived
	case k <= w.limit: // nothing within the span was dropped
		return int64(k)
	}
	above := (float64(^list[w.limit-1].priority) + 1) / (1 << 64) // chance of a row to draw that much or more
	return int64(float64(w.limit-1)/above + 0.5)
}

// draw takes limit rows from list, which is in falling order of priority: first the floor of every class, then the
// highest of all.
func (w *Window) draw(list []candidate) []candidate {
	taken := make([]bool, len(list))
	count := make([]int, len(w.seen))
	left, floor := w.limit, w.floor()
	for i := range list {
		if c := list[i].label; count[c] < floor {
			count[c]++
			taken[i] = true
			left--
		}
	}
	out := make([]candidate, 0, w.limit)
	for i := range list {
		if !taken[i] && left > 0 {
			taken[i] = true
			left--
		}
		if taken[i] {
			out = append(out, list[i])
		}
	}
	return out
}
