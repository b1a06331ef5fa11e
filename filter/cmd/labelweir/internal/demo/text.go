package demo

import (
	"fmt"
	"io"
	"math"
	"strings"
)

// introduce says what the line is and what was planted.
func introduce(w io.Writer, h *Harvest) {
	planted := 0
	for i := range h.Rows() {
		planted += count(h.wrong(i))
	}
	names := make([]string, len(grades))
	copy(names, grades[:])
	fmt.Fprintf(w, "An invented apple packing line. Sensors measured %d apples, and %d graders wrote a grade down for each:\n"+
		"%s. Everybody slips now and then; halfway, at apple %d, one grader begins\n"+
		"to confuse class-1 and class-2. %d of the grades are wrong, and labelweir is not told which.\n",
		h.Rows(), len(graders), strings.Join(names, ", "), h.Rows()/2, planted)
}

// WriteText writes the comparison for people.
func (o *Outcome) WriteText(w io.Writer) error {
	var b strings.Builder
	b.WriteString("What was planted, and what was found\n\n")
	b.WriteString("  wrong grades        first half             second half\n")
	b.WriteString("                   planted  estimated     planted  estimated\n")
	for _, g := range o.Graders {
		fmt.Fprintf(&b, "  %-12s  %10s %10s  %10s %10s\n", g.Name,
			percent(g.Planted[0]), percent(g.Estimated[0]), percent(g.Planted[1]), percent(g.Estimated[1]))
	}
	fmt.Fprintf(&b, "\n  Of the %d wrong grades\n", o.Planted)
	fmt.Fprintf(&b, "    %5d are among the %d apples with the highest scores (%s)\n", o.Top, o.Planted, percent(ratio(o.Top, o.Planted)))
	fmt.Fprintf(&b, "    %5d are among the %d that are suspect or near-certain (%s of these are wrong)\n",
		o.SuspectHit, o.Suspect, percent(ratio(o.SuspectHit, o.Suspect)))
	fmt.Fprintf(&b, "    %5d are among the %d held back (%s of these are wrong)\n", o.HeldHit, o.Held, percent(ratio(o.HeldHit, o.Held)))
	fmt.Fprintf(&b, "\n  Average precision %.3f; drawing apples at random would give %.3f.\n", o.Average, ratio(o.Planted, o.Rows))
	fmt.Fprintf(&b, "  %d apples went in; %d passed and %d were held back, each once.\n", o.Rows, o.Rows-o.Held, o.Held)
	_, err := io.WriteString(w, b.String())
	return err
}

func ratio(a, b int) float64 { return float64(a) / float64(b) }

// percent writes a share, or a dash when there is none.
func percent(x float64) string {
	if math.IsNaN(x) {
		return "–"
	}
	return fmt.Sprintf("%.1f %%", 100*x)
}
