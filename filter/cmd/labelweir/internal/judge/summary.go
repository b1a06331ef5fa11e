package main

import (
	"fmt"
	"io"

	"labelweir/filter/cmd/labelweir/internal/judge/metric"
)

// Above these shares a model is called unrestrained on labels that nobody flipped.
const (
	cleanShare = 0.02  // estimated share of wrong labels
	cleanNear  = 0.005 // share of rows with a score of nearCertain or more
)

// restraint tells how much is found where nothing was planted.
func restraint(out io.Writer, groups []group) {
	var share, near, held, ece []float64
	var loud []string
	for i := range groups {
		g := &groups[i]
		if g.plan != "clean" || g.failed() == len(g.cells) {
			continue
		}
		s, n := g.mean("share"), g.mean("share95")
		share, near = append(share, s), append(near, n)
		held, ece = append(held, g.mean("held_share")), append(ece, g.mean("ece"))
		if s > cleanShare || n > cleanNear {
			loud = append(loud, fmt.Sprintf("%s: estimated share %s, scores of %g or more %s", g.table, number(s), nearCertain, number(n)))
		}
	}
	if len(share) == 0 {
		return
	}
	fmt.Fprintf(out, "\nclean, %d tables: mean estimated share %s, scores of %g or more %s, held back %s, ece %s\n", len(share),
		number(mean(share)), nearCertain, number(mean(near)), number(mean(held)), number(mean(ece)))
	fmt.Fprintf(out, "over %g estimated or %g of the rows: %d tables\n", cleanShare, cleanNear, len(loud))
	for _, l := range loud {
		fmt.Fprintln(out, "  "+l)
	}
}

// pooled tells of all rows of the noisy plans together; of calibration without the plan feature, whose noise lies where
// honest rows are unsure as well.
func pooled(out io.Writer, groups []group) {
	var cal metric.Calibration
	var held, near metric.Cut
	var eces []float64
	cells, holding, right, covers := 0, 0, 0, 0.0
	for i := range groups {
		for _, f := range groups[i].cells {
			if f.err != nil || f.cell.Plan == "clean" {
				continue
			}
			if f.cell.Plan != "feature" {
				cal.Merge(f.calibration)
				eces = append(eces, f.calibration.Error())
			}
			held.Add(f.held)
			near.Add(f.near)
			cells++
			covers += f.covers()
			if f.held.Caught > 0 {
				holding++
				if f.held.Precision() >= nearCertain {
					right++
				}
			}
		}
	}
	if cells == 0 {
		return
	}
	if len(eces) > 0 {
		fmt.Fprintf(out, "\nece of the noisy plans but feature: %s over all %d rows, %s mean of %d cells\n", number(cal.Error()), cal.Rows(),
			number(mean(eces)), len(eces))
		for b := range metric.Bins {
			rows, score, wrong := cal.Bin(b)
			fmt.Fprintf(out, "  bin %d: %7d rows, mean score %s, wrong %s\n", b, rows, number(score), number(wrong))
		}
	}
	fmt.Fprintf(out, "noisy plans, %d cells: %d hold something back, %d of them with precision %g or more (%s)\n", cells, holding, right,
		nearCertain, number(float64(right)/float64(holding)))
	fmt.Fprintf(out, "all their rows: held back with precision %s and recall %s; scores of %g or more %s and %s\n",
		number(held.Precision()), number(held.Recall()), nearCertain, number(near.Precision()), number(near.Recall()))
	fmt.Fprintf(out, "the interval of the estimated share holds the planted share in %s of the cells\n", number(covers/float64(cells)))
}
