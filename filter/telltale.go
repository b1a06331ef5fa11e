package filter

import (
	"cmp"
	"fmt"
	"math"
	"slices"

	"labelweir/model"
)

// Limits of the search for columns that tell the label.
const (
	tellRows  = 4000  // rows looked at
	tellGroup = 20    // fewest rows of a group of like values whose label is believed
	tellShare = 0.001 // most rows that do not have their group's label, among all
	tellRare  = 0.02  // and among those that do not have the most frequent label
)

// telltales says what should be known of the columns that a fit has learned from: that none varies, or that one alone tells
// the label.
func telltales(t *model.Table) (notes []string) {
	n := t.Rows()
	if n < 2*tellGroup || len(t.Columns) == 0 {
		return nil
	}
	if !slices.ContainsFunc(t.Columns, func(c model.Column) bool { return varies(&c, n) }) {
		return []string{"no column that is learned from varies, so nothing can be learned: the scores only tell how frequent each label is; " +
			"name columns that differ from record to record with --fields"}
	}
	var rows []int32
	for i := 0; i < n; i += (n + tellRows - 1) / tellRows {
		if t.Labels[i] >= 0 {
			rows = append(rows, int32(i))
		}
	}
	others := len(rows) - most(t.Labels, rows, len(t.Classes))
	limit := int(min(tellShare*float64(len(rows)), tellRare*float64(others)))
	if others == 0 {
		return nil
	}
	for k := range t.Columns {
		c := &t.Columns[k]
		if c.Kind != model.Vector && untold(c, t.Labels, rows, len(t.Classes)) <= limit {
			notes = append(notes, fmt.Sprintf("column %q alone tells the label: if it was made from the label, wrong labels can't be found "+
				"beside it; leave it out, by naming the other columns with --fields", c.Name))
		}
	}
	return notes
}

// varies tells whether some row of the first n has another value than the first row; missing is a value too.
func varies(c *model.Column, n int) bool {
	if c.Kind == model.Category {
		return slices.ContainsFunc(c.Codes[:n], func(v int32) bool { return v != c.Codes[0] })
	}
	for i, v := range c.Values[:n*c.Size] {
		if u := c.Values[i%c.Size]; v != u && (v == v || u == u) {
			return true
		}
	}
	return false
}

// untold counts the rows whose label is not the most frequent one of the rows with like values: the same level, or
// neighbouring numbers, equal ones never apart. Rows in groups too small to believe count as well.
func untold(c *model.Column, labels, rows []int32, classes int) int {
	order := slices.Clone(rows)
	value := func(i int32) float64 {
		if c.Kind == model.Category {
			return float64(c.Codes[i])
		}
		if v := c.Values[i]; v == v {
			return v
		}
		return math.Inf(-1)
	}
	slices.SortFunc(order, func(a, b int32) int { return cmp.Compare(value(a), value(b)) })
	wrong := 0
	for lo := 0; lo < len(order); {
		hi := lo + 1
		small := func() bool { return c.Kind != model.Category && min(hi-lo, len(order)-hi) < tellGroup }
		for hi < len(order) && (value(order[hi]) == value(order[hi-1]) || small()) {
			hi++
		}
		if wrong += hi - lo; hi-lo >= tellGroup {
			wrong -= most(labels, order[lo:hi], classes)
		}
		lo = hi
	}
	return wrong
}

// most is the number of the listed rows that have the most frequent label.
func most(labels, rows []int32, classes int) int {
	count := make([]int, classes)
	for _, i := range rows {
		count[labels[i]]++
	}
	return slices.Max(count)
}
