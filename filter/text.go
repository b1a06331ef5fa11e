package filter

import (
	"fmt"
	"io"
	"math"
	"slices"
	"strings"
)

// WriteText writes a summary for people: plain text, at most 100 columns wide, ended by a line break. Names are
// shortened to fit, and what a terminal would not show as it is is escaped. It is written in one piece.
func (r *Report) WriteText(w io.Writer) error {
	p := &page{}
	p.verdicts(r)
	p.noise(r)
	p.flips(r.Noise)
	p.training(r)
	p.breaker(&r.Breaker)
	p.times(r.Times)
	p.notes(r.Notes)
	_, err := io.WriteString(w, p.text.String())
	return err
}

// verdicts tells what became of the records.
func (p *page) verdicts(r *Report) {
	n := r.Rows
	p.line("%s records read in mode %s: %s tagged, %s held back", thousands(n.In), r.Mode, thousands(n.Tagged), thousands(n.Quarantine))
	if n.Unreadable > 0 {
		p.line("%s records could not be read", thousands(n.Unreadable))
	}
	p.head("Verdicts", "records", "share")
	row := func(name string, count int64, more string) {
		p.row(name, thousands(count), percent(float64(count)/float64(n.In)), more)
	}
	row("pass", n.Verdicts.Pass, "")
	row("suspect", n.Verdicts.Suspect, "")
	row("quarantine", n.Verdicts.Quarantine, threshold(r))
	row("unscored", n.Verdicts.Unscored, "")
	u := n.Reasons
	for _, x := range []struct {
		name string
		n    int64
	}{{"no-label", u.NoLabel}, {"new-class", u.NewClass}, {"not-finite", u.NotFinite}, {"warming-up", u.WarmingUp},
		{"inputs-changed", u.InputsChanged}} {
		if x.n > 0 {
			row("  "+x.name, x.n, "")
		}
	}
}

func threshold(r *Report) string {
	t := float64(r.Threshold)
	switch {
	case math.IsNaN(t):
		return ""
	case t > 1:
		return fmt.Sprintf("no score is sure enough for precision %g", r.Precision)
	}
	return fmt.Sprintf("from score %.3f on, for precision %g", t, r.Precision)
}

// Most lines of a kind that the summary shows; the report has them all.
const (
	maxClasses = 20
	maxSources = 10
	maxFlips   = 12
)

// noise tells the estimated shares of wrong labels: of all, by class, and of the sources with the highest ones.
func (p *page) noise(r *Report) {
	n := r.Noise
	if n == nil {
		return
	}
	p.head("Wrong labels, estimated", "share", "90 % interval", "records")
	rate := func(name string, e Rate) {
		if math.IsNaN(float64(e.Value)) {
			p.row(name, "can't tell", "", "")
			return
		}
		p.row(name, percent(float64(e.Value)), percent(float64(e.Low))+" to "+percent(float64(e.High)), thousands(int64(e.Rows)))
	}
	rate("all records", n.Share)
	if r.Latest != nil {
		rate("all records, newest snapshot alone", r.Latest.Share)
	}
	for _, c := range n.Classes[:min(len(n.Classes), maxClasses)] {
		if slices.Contains(n.Unclear, c.Name) {
			c.Value = notANumber()
		}
		rate("observed "+shown(c.Name), c.Rate)
	}
	p.more(len(n.Classes)-maxClasses, "classes")
	byShare := slices.Clone(n.Sources)
	slices.SortStableFunc(byShare, func(a, b Named) int { return -compareNumbers(a.Value, b.Value) })
	for _, s := range byShare[:min(len(byShare), maxSources)] {
		rate("from "+shown(s.Name), s.Rate)
	}
	p.more(len(byShare)-maxSources, "sources with lower shares")
	if len(n.Unclear) > 0 {
		p.para("  ", "Wrong labels can't be told from overlap where no record is surely of the class: "+
			strings.Join(all(n.Unclear, shown), ", ")+".")
	}
}

// compareNumbers orders numbers, one that is not known before all others.
func compareNumbers(a, b Number) int {
	switch {
	case a == b || math.IsNaN(float64(a)) && math.IsNaN(float64(b)):
		return 0
	case a < b || math.IsNaN(float64(a)):
		return -1
	}
	return 1
}

// flips shows the matrix of flip rates when it fits, else the highest ones.
func (p *page) flips(n *Noise) {
	if n == nil || len(n.Flip) == 0 {
		return
	}
	names := make([]string, len(n.Classes))
	width := nameWidth
	for i, c := range n.Classes {
		names[i] = shown(c.Name)
		width += columnWidth(names[i])
	}
	if width > pageWidth {
		p.highestFlips(n, names)
		return
	}
	p.head("Flip rates: true class \\ observed", names...)
	for i, row := range n.Flip {
		cells := make([]string, len(row))
		for j, e := range row {
			if cells[j] = percent(float64(e.Value)); i == j {
				cells[j] = "."
			}
		}
		p.row(names[i], cells...)
	}
}

// highestFlips lists the highest rates of the matrix.
func (p *page) highestFlips(n *Noise, names []string) {
	type flip struct {
		from, to int
		Rate
	}
	var list []flip
	for i, row := range n.Flip {
		for j, e := range row {
			if i != j && e.Value > 0 {
				list = append(list, flip{i, j, e})
			}
		}
	}
	slices.SortStableFunc(list, func(a, b flip) int { return -compareNumbers(a.Value, b.Value) })
	p.head("Flip rates: true class > observed", "rate", "90 % interval")
	for _, f := range list[:min(len(list), maxFlips)] {
		p.row(clip(names[f.from], 15)+" > "+clip(names[f.to], 15),
			percent(float64(f.Value)), percent(float64(f.Low))+" to "+percent(float64(f.High)))
	}
	p.more(len(list)-maxFlips, "lower rates")
}

// training tells what was trained on, what was chosen, and which chains won.
func (p *page) training(r *Report) {
	p.head("Training")
	w := r.Window
	window := fmt.Sprintf("%s, %s rows in the newest fit", w.Kind, thousands(int64(w.Trained)))
	if w.Sampled {
		window += ", sampled"
	}
	p.fact("window", window)
	if c := r.Choice; c != nil {
		p.fact("encoder", c.Encoder)
		p.fact("loss", fmt.Sprintf("q = %s, lambda = %s", number(c.Q), number(c.Lambda)))
		var members []string
		for _, m := range c.Members {
			members = append(members, shown(m.Name)+" "+number(m.Weight))
		}
		p.fact("members", strings.Join(members, ", "))
		p.fact("why", c.Why)
	}
	p.fact("retrains", fmt.Sprintf("%d cold, %d warm, %d not possible", r.Retrains.Cold, r.Retrains.Warm, r.Retrains.Failed))
	for i, c := range r.Chains {
		name := ""
		if i == 0 {
			name = "chains"
		}
		p.fact(name, fmt.Sprintf("%s won %s of %s, on average %.2f %% above the best", shown(c.Name),
			thousands(int64(c.Won)), thousands(int64(c.Tried)), 100*float64(c.MeanGap)))
	}
	var used []string
	for _, f := range r.Fields {
		if f.Use == "feature" {
			used = append(used, shown(f.Path))
		}
	}
	if len(used) > 0 {
		p.fact("fields", fmt.Sprintf("%d of %d columns: %s", len(used), len(r.Fields), strings.Join(used[:min(len(used), 40)], ", ")))
	}
	p.fact("snapshot", r.Snapshot)
}

// maxShownEvents is how many openings and closings of the breaker the summary shows.
const maxShownEvents = 6

// breaker tells when diverting was stopped; nothing when it never was.
func (p *page) breaker(b *Breaker) {
	if len(b.Events) == 0 {
		return
	}
	state := "closed at the end"
	if b.Open {
		state = "open at the end"
	}
	p.head(fmt.Sprintf("Breaker: opened %d times, %s", b.Opened, state))
	for _, e := range b.Events[:min(len(b.Events), maxShownEvents)] {
		what := "closed"
		if e.Open {
			what = "opened"
		}
		p.para("  ", fmt.Sprintf("row %s %s (%s): %s", thousands(e.Row), what, e.Cause, e.Why))
	}
	p.more(len(b.Events)-maxShownEvents, "events")
}

// times tells where the time went.
func (p *page) times(list []Spent) {
	if len(list) == 0 {
		return
	}
	p.head("Time", "seconds")
	for _, s := range list {
		p.row(strings.Replace(s.Phase, "fit/", "fit: ", 1), fmt.Sprintf("%.2f", s.Seconds))
	}
}

func (p *page) notes(list []string) {
	if len(list) == 0 {
		return
	}
	p.head("Notes")
	for _, n := range list {
		p.para("  ", n)
	}
}
