package main

import (
	"fmt"
	"io"
	"text/tabwriter"

	"labelweir/filter/cmd/labelweir/internal/judge/panel"
)

// compared lists the figures whose differences are told.
func compared() []string {
	return []string{"ap", "ece", "held_precision", "held_recall", "prec95", "share95", "share_error", "flip_mean", "seconds"}
}

// shift is how the figures of a set of cells moved against older ones, one entry a compared figure.
type shift struct {
	values [][]float64
	cells  int
}

func newShift() *shift { return &shift{values: make([][]float64, len(compared()))} }

// add notes a cell that both runs have figures for.
func (s *shift) add(f *figures, old map[string]string) {
	s.cells++
	for i, name := range compared() {
		s.values[i] = append(s.values[i], fieldNamed(name).value(f)-panel.Number(old[name]))
	}
}

func (s *shift) write(w io.Writer, table, plan string) {
	fmt.Fprintf(w, "%s\t%s\t%d", table, plan, s.cells)
	for _, v := range s.values {
		fmt.Fprint(w, "\t", signed(mean(v)))
	}
	fmt.Fprintln(w)
}

// compare tells what moved against cells read from a file of writeCells: by table and plan, then by plan, then overall.
// Only cells that both runs have are compared.
func compare(out io.Writer, cells []figures, old []map[string]string) error {
	before := map[string]map[string]string{}
	for _, l := range old {
		before[l["table"]+"\t"+l["plan"]+"\t"+l["seed"]] = l
	}
	groups := grouped(cells, nil)
	plans, all := map[string]*shift{}, newShift()
	fmt.Fprintln(out, "\ndifferences against the earlier run, new minus old")
	w := tabwriter.NewWriter(out, 0, 8, 2, ' ', 0)
	fmt.Fprint(w, "table\tplan\tcells")
	for _, name := range compared() {
		fmt.Fprint(w, "\t", name)
	}
	fmt.Fprintln(w)
	for i := range groups {
		g, own := &groups[i], newShift()
		if plans[g.plan] == nil {
			plans[g.plan] = newShift()
		}
		for _, f := range g.cells {
			l, ok := before[fmt.Sprintf("%s\t%s\t%d", f.table, f.cell.Plan, f.cell.Seed)]
			if !ok || f.err != nil || l["error"] != "" {
				continue
			}
			for _, s := range []*shift{own, plans[g.plan], all} {
				s.add(f, l)
			}
		}
		if own.cells > 0 {
			own.write(w, g.table, g.plan)
		}
	}
	for _, plan := range distinct(groups, func(g *group) string { return g.plan }) {
		if plans[plan].cells > 0 {
			plans[plan].write(w, "all", plan)
		}
	}
	all.write(w, "all", "all")
	return w.Flush()
}
