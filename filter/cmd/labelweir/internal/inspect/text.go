// Package inspect puts a saved snapshot into words.
package inspect

import (
	"fmt"
	"io"
	"math"
	"slices"
	"strings"

	"labelweir/model"
)

// Text writes what the snapshot with that id was trained on, what was chosen, and what it found, for people.
func Text(w io.Writer, id string, f *model.Facts) error {
	t := &text{}
	t.line("snapshot %s, trained on %d labelled rows, %s", id, f.Rows, start(f.Warm))
	t.blank()
	t.choice(f)
	t.blank()
	t.noise(f)
	t.blank()
	t.flips(f)
	t.blank()
	t.chains(f)
	_, err := io.WriteString(w, strings.TrimRight(t.b.String(), "\n")+"\n")
	return err
}

func start(warm bool) string {
	if warm {
		return "starting from the snapshot before it"
	}
	return "from scratch"
}

// text collects lines; two blank ones never follow each other.
type text struct{ b strings.Builder }

func (t *text) line(format string, args ...any) { fmt.Fprintf(&t.b, format+"\n", args...) }

func (t *text) blank() {
	if s := t.b.String(); s != "" && !strings.HasSuffix(s, "\n\n") {
		t.b.WriteByte('\n')
	}
}

// choice tells how scores come about.
func (t *text) choice(f *model.Facts) {
	c := f.Choice
	t.line("encoder %s, q %.4g, λ %.3g", named(c.Encoder), c.Q, c.Lambda)
	if c.Why != "" {
		t.line("  %s", c.Why)
	}
	for _, m := range c.Members {
		t.line("  scorer %s with weight %.3f", m.Name, m.Weight)
	}
	if f.Threshold > 1 {
		t.line("no score is high enough to hold a record back at the wanted precision")
	} else {
		t.line("records may be held back from a score of %.4f on", f.Threshold)
	}
}

func named(s string) string {
	if s == "" {
		return "without a name"
	}
	return s
}

// noise tells the estimated shares of wrong labels.
func (t *text) noise(f *model.Facts) {
	t.line("wrong labels, with approximate 90 %% intervals: %s", estimate(f.Noise.Share))
	if f.Noise.Model != "" {
		t.line("  noise model: %s", f.Noise.Model)
	}
	width := longest(append(slices.Clone(f.Classes), f.Sources...))
	for i, class := range f.Classes {
		rows := ""
		if i < len(f.ClassRows) {
			rows = fmt.Sprintf(" (%d rows)", f.ClassRows[i])
		}
		switch {
		case slices.Contains(f.Noise.Unclear, class):
			t.line("  class  %-*s  can't be told from overlap with other classes%s", width, class, rows)
		case i < len(f.Noise.ByClass):
			t.line("  class  %-*s  %s%s", width, class, estimate(f.Noise.ByClass[i]), rows)
		default:
			t.line("  class  %-*s %s", width, class, rows)
		}
	}
	for i, source := range f.Sources {
		if i < len(f.Noise.BySource) {
			t.line("  source %-*s  %s (%d rows)", width, source, estimate(f.Noise.BySource[i]), f.Noise.BySource[i].Rows)
		}
	}
}

// flips writes the flip-rate matrix.
func (t *text) flips(f *model.Facts) {
	if len(f.Noise.Flip) == 0 {
		return
	}
	t.line("flip rates: a record of the class at the left was labelled as the class above, in %%")
	width := longest(f.Classes)
	cell := max(6, width)
	row := fmt.Sprintf("  %-*s", width, "")
	for _, class := range f.Classes {
		row += fmt.Sprintf("  %*s", cell, class)
	}
	t.line("%s", row)
	for i, rates := range f.Noise.Flip {
		row := fmt.Sprintf("  %-*s", width, f.Classes[i])
		for _, r := range rates {
			row += fmt.Sprintf("  %*s", cell, percent(r.Value))
		}
		t.line("%s", row)
	}
}

// chains tells which optimisation runs gave the weights.
func (t *text) chains(f *model.Facts) {
	for _, c := range f.Chains {
		t.line("chain %s won %d of %d runs, on average %.3f %% above the lowest objective", c.Name, c.Won, c.Tried, 100*c.MeanGap)
	}
}

func estimate(e model.Estimate) string {
	return fmt.Sprintf("%s %% (%s to %s)", percent(e.Value), percent(e.Low), percent(e.High))
}

// percent writes a share without its sign, or a question mark when it is not known.
func percent(x float64) string {
	if math.IsNaN(x) {
		return "?"
	}
	return fmt.Sprintf("%.2f", 100*x)
}

func longest(names []string) int {
	n := 0
	for _, s := range names {
		n = max(n, len([]rune(s)))
	}
	return n
}
