package demo

import (
	"cmp"
	"math"
	"slices"
)

// Outcome sets what was planted against what was found.
type Outcome struct {
	Rows    int
	Planted int // wrong grades
	Scored  int // apples with a score

	Graders []GraderOutcome

	Top        int     // planted wrong grades among the Planted highest scores
	Suspect    int     // apples with the verdict suspect or quarantine
	SuspectHit int     // planted ones among them
	Held       int     // apples held back
	HeldHit    int     // planted ones among them
	Average    float64 // average precision of the ranking by score
}

// GraderOutcome is one grader's share of wrong grades, planted and estimated, in the first and second half.
type GraderOutcome struct {
	Name               string
	Planted, Estimated [2]float64
}

// compare sets f against h.
func compare(h *Harvest, f *found) *Outcome {
	o := &Outcome{Rows: h.Rows(), Graders: byGrader(h, f)}
	ranked := make([]int, 0, h.Rows())
	for i := range h.Rows() {
		wrong := h.wrong(i)
		if wrong {
			o.Planted++
		}
		if !math.IsNaN(f.score[i]) {
			ranked = append(ranked, i)
		}
		if v := f.verdict[i]; v == "suspect" || v == "quarantine" {
			o.Suspect++
			o.SuspectHit += count(wrong)
		}
		if f.held[i] {
			o.Held++
			o.HeldHit += count(wrong)
		}
	}
	o.Scored = len(ranked)
	slices.SortStableFunc(ranked, func(a, b int) int { return cmp.Compare(f.score[b], f.score[a]) })
	hits := 0
	for place, i := range ranked {
		if !h.wrong(i) {
			continue
		}
		hits++
		o.Average += float64(hits) / float64(place+1)
		o.Top += count(place < o.Planted)
	}
	if o.Planted > 0 {
		o.Average /= float64(o.Planted)
	}
	return o
}

// byGrader compares the planted share of each grader and half with the mean score there.
func byGrader(h *Harvest, f *found) []GraderOutcome {
	out := make([]GraderOutcome, len(graders))
	rows, scored := make([][2]float64, len(graders)), make([][2]float64, len(graders))
	for i := range h.Rows() {
		g, half := h.graders[i], count(h.secondHalf(i))
		rows[g][half]++
		out[g].Planted[half] += float64(count(h.wrong(i)))
		if !math.IsNaN(f.score[i]) {
			scored[g][half]++
			out[g].Estimated[half] += f.score[i]
		}
	}
	for g := range out {
		out[g].Name = graders[g].name
		for half := range 2 {
			out[g].Planted[half] /= rows[g][half]
			out[g].Estimated[half] /= scored[g][half] // NaN when nothing was scored
		}
	}
	return out
}

func count(b bool) int {
	if b {
		return 1
	}
	return 0
}
