package main

import (
	"math"
	"slices"

	"labelweir/filter/cmd/labelweir/internal/judge/panel"
)

// level is how far two average precisions may be apart and still count as the same.
const level = 0.005

// group is the cells of one table and plan, one a seed, beside the baselines of the same table and plan.
type group struct {
	table, plan string
	cells       []*figures
	best        panel.Baseline // the marked method; AP and ECE are NaN when there is none
	lowECE      float64        // lowest calibration error of any baseline
	bySource    panel.Baseline // the one that reads sources; Method is empty when there is none
}

// grouped puts the cells of one table and plan together, in the order of their first cell.
func grouped(cells []figures, base []panel.Baseline) []group {
	var out []group
	for i := range cells {
		f := &cells[i]
		at := slices.IndexFunc(out, func(g group) bool { return g.table == f.table && g.plan == f.cell.Plan })
		if at < 0 {
			at = len(out)
			out = append(out, newGroup(f.table, f.cell.Plan, base))
		}
		out[at].cells = append(out[at].cells, f)
	}
	return out
}

func newGroup(table, plan string, base []panel.Baseline) group {
	nan := math.NaN()
	g := group{table: table, plan: plan, lowECE: nan, best: panel.Baseline{AP: nan, ECE: nan}}
	for _, b := range base {
		if b.Table != table || b.Plan != plan {
			continue
		}
		if b.Best {
			g.best = b
		}
		if b.Method == "rf+em.src" {
			g.bySource = b
		} else if !math.IsNaN(b.ECE) && !(g.lowECE <= b.ECE) {
			g.lowECE = b.ECE
		}
	}
	return g
}

// mean of a figure over the seeds that have it.
func (g *group) mean(name string) float64 {
	d := fieldNamed(name)
	values := make([]float64, len(g.cells))
	for i, f := range g.cells {
		values[i] = d.value(f)
	}
	return mean(values)
}

// mark says where the group's average precision stands to the best baseline's; empty when one is missing.
func (g *group) mark() string {
	d := g.mean("ap") - g.best.AP
	switch {
	case math.IsNaN(d):
		return ""
	case d > level:
		return "ahead"
	case d < -level:
		return "behind"
	}
	return "level"
}

// failed counts the cells without figures.
func (g *group) failed() int {
	n := 0
	for _, f := range g.cells {
		if f.err != nil {
			n++
		}
	}
	return n
}
