package encode

import (
	"cmp"
	"slices"
)

// frequent lists the levels that get a column of their own, the most frequent first, those equally frequent by name.
func frequent(in *Input, rows []int32) []string {
	counts := make([]int, len(in.Levels))
	for _, i := range rows {
		if c := in.Codes[i]; c >= 0 {
			counts[c]++
		}
	}
	var order []int
	for c, n := range counts {
		if n >= minLevel {
			order = append(order, c)
		}
	}
	slices.SortFunc(order, func(a, b int) int {
		return cmp.Or(cmp.Compare(counts[b], counts[a]), cmp.Compare(in.Levels[a], in.Levels[b]))
	})
	order = order[:min(len(order), maxLevels)]
	out := make([]string, len(order))
	for i, c := range order {
		out[i] = in.Levels[c]
	}
	return out
}

// Bind extends slots, which holds the slot of each code of names so far, to all of names: levels without a column of
// their own share one. names only grows.
func (p *Part) Bind(slots []int32, names []string) []int32 {
	if p.Numbers != nil || len(slots) >= len(names) {
		return slots
	}
	at := make(map[string]int32, len(p.Levels))
	for i, name := range p.Levels {
		at[name] = int32(i)
	}
	for _, name := range names[len(slots):] {
		slot, ok := at[name]
		if !ok {
			slot = int32(len(p.Levels))
		}
		slots = append(slots, slot)
	}
	return slots
}
