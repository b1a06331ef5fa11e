package main

import (
	"fmt"
	"io"
	"strings"
	"text/tabwriter"

	"labelweir/filter/cmd/labelweir/internal/judge/panel"
)

// report writes the table of groups and the summaries.
func report(out io.Writer, cells []figures, base []panel.Baseline) error {
	groups := grouped(cells, base)
	w := tabwriter.NewWriter(out, 0, 8, 2, ' ', 0)
	columns := "table plan seeds ap best method diff mark ece best_ece low_ece held_prec held_rec prec95 rec95 share95 " +
		"share_err flip_max flip_mean covers seconds"
	fmt.Fprintln(w, strings.ReplaceAll(columns, " ", "\t"))
	for i := range groups {
		groups[i].write(w)
	}
	if err := w.Flush(); err != nil {
		return err
	}
	notes(out, cells, groups)
	standing(out, groups)
	planMeans(out, groups)
	restraint(out, groups)
	pooled(out, groups)
	return nil
}

// write gives the group's line.
func (g *group) write(w io.Writer) {
	ap := g.mean("ap")
	fmt.Fprintf(w, "%s\t%s\t%d\t%s\t%s\t%s\t%s\t%s", g.table, g.plan, len(g.cells)-g.failed(), number(ap),
		number(g.best.AP), g.best.Method, signed(ap-g.best.AP), g.mark())
	fmt.Fprintf(w, "\t%s\t%s\t%s", number(g.mean("ece")), number(g.best.ECE), number(g.lowECE))
	for _, name := range strings.Fields("held_precision held_recall prec95 rec95 share95 share_error flip_max flip_mean covers") {
		fmt.Fprint(w, "\t", number(g.mean(name)))
	}
	fmt.Fprintf(w, "\t%s\n", number(g.mean("seconds")))
}

// notes lists what the table has no place for: errors, rows without a score, the baseline that reads sources.
func notes(out io.Writer, cells []figures, groups []group) {
	fmt.Fprintln(out)
	for i := range cells {
		f := &cells[i]
		if f.err != nil {
			fmt.Fprintf(out, "no figures: %s\n", f.line())
		} else if f.unscored > 0 {
			fmt.Fprintf(out, "unscored: %s %s %d: %d of %d rows\n", f.table, f.cell.Plan, f.cell.Seed, f.unscored, f.rows)
		}
	}
	for i := range groups {
		if g := &groups[i]; g.bySource.Method != "" {
			ap := g.mean("ap")
			fmt.Fprintf(out, "sources known: %s %s: ap %s, %s %s (%s), ece %s against %s\n", g.table, g.plan, number(ap),
				g.bySource.Method, number(g.bySource.AP), signed(ap-g.bySource.AP), number(g.mean("ece")), number(g.bySource.ECE))
		}
	}
}

// standing counts ahead, level and behind: overall, by plan and by table.
func standing(out io.Writer, groups []group) {
	fmt.Fprintf(out, "\nap against the best baseline (level: within %.3f)\n", level)
	w := tabwriter.NewWriter(out, 0, 8, 2, ' ', 0)
	fmt.Fprintln(w, "of\tahead\tlevel\tbehind\tmean diff")
	count := func(name string, in func(*group) bool) {
		marks := map[string]int{}
		var diffs []float64
		for i := range groups {
			if g := &groups[i]; in(g) && g.mark() != "" {
				marks[g.mark()]++
				diffs = append(diffs, g.mean("ap")-g.best.AP)
			}
		}
		if len(diffs) > 0 {
			fmt.Fprintf(w, "%s\t%d\t%d\t%d\t%s\n", name, marks["ahead"], marks["level"], marks["behind"], signed(mean(diffs)))
		}
	}
	count("all", func(*group) bool { return true })
	for _, plan := range distinct(groups, func(g *group) string { return g.plan }) {
		count(plan, func(g *group) bool { return g.plan == plan })
	}
	for _, table := range distinct(groups, func(g *group) string { return g.table }) {
		count(table, func(g *group) bool { return g.table == table })
	}
	w.Flush()
}

// planMeans sets the mean figures of each plan beside the mean best baseline, over the tables that have both.
func planMeans(out io.Writer, groups []group) {
	fmt.Fprintln(out, "\nmean over tables")
	w := tabwriter.NewWriter(out, 0, 8, 2, ' ', 0)
	fmt.Fprintln(w, "plan\tap\tbest\tece\tbest_ece\tlow_ece\theld_prec\theld_rec\tshare_err\tflip_max\tflip_mean\tcovers\tseconds")
	for _, plan := range distinct(groups, func(g *group) string { return g.plan }) {
		over := func(of func(*group) float64) string {
			var values []float64
			for i := range groups {
				if g := &groups[i]; g.plan == plan && g.failed() < len(g.cells) {
					values = append(values, of(g))
				}
			}
			return number(mean(values))
		}
		figure := func(name string) string { return over(func(g *group) float64 { return g.mean(name) }) }
		fmt.Fprintf(w, "%s\t%s\t%s\t%s\t%s\t%s", plan, figure("ap"), over(func(g *group) float64 { return g.best.AP }), figure("ece"),
			over(func(g *group) float64 { return g.best.ECE }), over(func(g *group) float64 { return g.lowECE }))
		for _, name := range strings.Fields("held_precision held_recall share_error flip_max flip_mean covers seconds") {
			fmt.Fprint(w, "\t", figure(name))
		}
		fmt.Fprintln(w)
	}
	w.Flush()
}

// distinct lists the names of the groups in the order of their first group.
func distinct(groups []group, name func(*group) string) []string {
	var out []string
	seen := map[string]bool{}
	for i := range groups {
		if n := name(&groups[i]); !seen[n] {
			seen[n] = true
			out = append(out, n)
		}
	}
	return out
}
