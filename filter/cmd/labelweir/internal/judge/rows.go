package main

import (
	"bufio"
	"fmt"
	"os"

	"labelweir/filter"
)

// writeRows writes one line a row, tab-separated, under a head of names: whether its label is wrong, what was said of it,
// and its score out of fold in the first fit that saw it.
func writeRows(path string, wrong []bool, list []filter.Tag, fold []float64) error {
	out, err := os.Create(path)
	if err != nil {
		return err
	}
	w := bufio.NewWriter(out)
	fmt.Fprintln(w, "row\twrong\tscore\tmargin\tverdict\treason\tdiverted\tfold\tsnapshot")
	for i, t := range list {
		fmt.Fprintf(w, "%d\t%t\t%s\t%s\t%s\t%s\t%t\t%s\t%s\n", i, wrong[i], exact(t.Score), exact(t.Margin), t.Verdict,
			t.Reason, t.Divert, exact(fold[i]), t.Snapshot)
	}
	if err := w.Flush(); err != nil {
		out.Close()
		return err
	}
	return out.Close()
}
