package main

import (
	"bufio"
	"fmt"
	"io"
	"math"
	"os"
	"text/tabwriter"

	"labelweir/filter/cmd/labelweir/internal/judge/panel"
)

// streamFields lists the numeric figures of a stream; those that baselines have as well come first.
func streamFields() []struct {
	name string
	of   func(*streamFigures) float64
} {
	type f = streamFigures
	return []struct {
		name string
		of   func(*f) float64
	}{
		{"ap_all", func(s *f) float64 { return s.parts[0] }},
		{"ap_pre", func(s *f) float64 { return s.parts[1] }},
		{"ap_post", func(s *f) float64 { return s.parts[2] }},
		{"ap_late", func(s *f) float64 { return s.parts[3] }},
		{"ece", func(s *f) float64 { return s.calibration.Error() }},
		{"prec95", func(s *f) float64 { return s.near.Precision() }},
		{"share95", func(s *f) float64 { return s.near.Share() }},
		{"held_prec", func(s *f) float64 { return s.held.Precision() }},
		{"held_share", func(s *f) float64 { return s.held.Share() }},
		{"sure_prec", func(s *f) float64 { return s.sure.Precision() }},
		{"sure_share", func(s *f) float64 { return s.sure.Share() }},
		{"unscored", func(s *f) float64 { return float64(s.unscored) / float64(s.rows) }},
		{"fold_ap", func(s *f) float64 { return s.foldAP }},
		{"fold_ece", func(s *f) float64 { return s.fold.Error() }},
		{"opened", func(s *f) float64 { return float64(s.report.Breaker.Opened) }},
		{"cold", func(s *f) float64 { return float64(s.report.Retrains.Cold) }},
		{"warm", func(s *f) float64 { return float64(s.report.Retrains.Warm) }},
		{"failed", func(s *f) float64 { return float64(s.report.Retrains.Failed) }},
		{"cold_s", func(s *f) float64 { return s.trained.coldTime.Seconds() / float64(s.trained.cold) }},
		{"warm_s", func(s *f) float64 { return s.trained.warmTime.Seconds() / float64(s.trained.warm) }},
		{"seconds", func(s *f) float64 { return s.seconds }},
	}
}

// compareWith is how many of streamFields, from the first, are set beside the baselines.
const compareWith = 7

// streamMark says where a figure stands to the best baseline's; empty when one is missing.
func streamMark(name string, value, best float64) string {
	switch d := panel.Better(name, value, best); {
	case math.IsNaN(d):
		return ""
	case d > level:
		return "ahead"
	case d < -level:
		return "behind"
	}
	return "level"
}

// reportStreams writes each stream's figures beside the best of the baselines, and the counts.
func reportStreams(out io.Writer, streams []streamFigures, base []panel.StreamBaseline) error {
	w := tabwriter.NewWriter(out, 0, 8, 2, ' ', 0)
	fmt.Fprintln(w, "stream\tfigure\tvalue\tbest\tmethod\tbetter by\tmark")
	fields := streamFields()
	counts := make([]map[string]int, compareWith)
	sums := make([][]float64, compareWith)
	for i := range counts {
		counts[i] = map[string]int{}
	}
	for i := range streams {
		s := &streams[i]
		if s.err != nil {
			continue
		}
		for k, d := range fields[:compareWith] {
			v := d.of(s)
			best, method := panel.BestFigure(base, s.stream, d.name)
			mark := streamMark(d.name, v, best)
			fmt.Fprintf(w, "%s\t%s\t%s\t%s\t%s\t%s\t%s\n", s.stream, d.name, number(v), number(best), method,
				signed(panel.Better(d.name, v, best)), mark)
			if mark != "" {
				counts[k][mark]++
				sums[k] = append(sums[k], panel.Better(d.name, v, best))
			}
		}
	}
	if err := w.Flush(); err != nil {
		return err
	}
	streamRest(out, streams)
	streamNotes(out, streams)
	fmt.Fprintf(out, "\nagainst the best baseline of each figure (level: within %.3f)\n", level)
	fmt.Fprintln(w, "figure\tahead\tlevel\tbehind\tmean better by")
	total := map[string]int{}
	for k, d := range fields[:compareWith] {
		fmt.Fprintf(w, "%s\t%d\t%d\t%d\t%s\n", d.name, counts[k]["ahead"], counts[k]["level"], counts[k]["behind"], signed(mean(sums[k])))
		for mark, n := range counts[k] {
			total[mark] += n
		}
	}
	fmt.Fprintf(w, "all\t%d\t%d\t%d\n", total["ahead"], total["level"], total["behind"])
	return w.Flush()
}

// streamRest writes what no baseline has.
func streamRest(out io.Writer, streams []streamFigures) {
	fmt.Fprintln(out)
	w := tabwriter.NewWriter(out, 0, 8, 2, ' ', 0)
	fmt.Fprint(w, "stream")
	for _, d := range streamFields()[compareWith:] {
		fmt.Fprint(w, "\t", d.name)
	}
	fmt.Fprintln(w)
	for i := range streams {
		s := &streams[i]
		if s.err != nil {
			continue
		}
		fmt.Fprint(w, s.stream)
		for _, d := range streamFields()[compareWith:] {
			if v := d.of(s); v == math.Trunc(v) && v > 1 {
				fmt.Fprintf(w, "\t%.0f", v)
			} else {
				fmt.Fprint(w, "\t", number(v))
			}
		}
		fmt.Fprintln(w)
	}
	w.Flush()
}

// streamNotes lists errors, why rows have no score, what the breaker did, and what the report notes.
func streamNotes(out io.Writer, streams []streamFigures) {
	fmt.Fprintln(out)
	for i := range streams {
		s := &streams[i]
		if s.err != nil {
			fmt.Fprintf(out, "no figures: %s\n", s.line())
			continue
		}
		if s.report.Rows.Verdicts.Unscored > 0 {
			fmt.Fprintf(out, "%s: unscored of all rows: %+v\n", s.stream, s.report.Rows.Reasons)
		}
		for _, e := range s.report.Breaker.Events {
			what := "closes"
			if e.Open {
				what = "opens"
			}
			fmt.Fprintf(out, "%s: row %d: %s %s: %s\n", s.stream, e.Row, e.Cause, what, e.Why)
		}
		for _, n := range s.report.Notes {
			fmt.Fprintf(out, "%s: %s\n", s.stream, n)
		}
	}
}

// writeStreams writes one line a stream, tab-separated, under a head of names; NA stands for a figure without a value.
func writeStreams(path string, streams []streamFigures) error {
	out, err := os.Create(path)
	if err != nil {
		return err
	}
	w := bufio.NewWriter(out)
	fmt.Fprint(w, "stream")
	for _, d := range streamFields() {
		fmt.Fprint(w, "\t", d.name)
	}
	fmt.Fprintln(w, "\terror")
	for i := range streams {
		s := &streams[i]
		fmt.Fprint(w, s.stream)
		for _, d := range streamFields() {
			v := math.NaN()
			if s.err == nil {
				v = d.of(s)
			}
			fmt.Fprint(w, "\t", exact(v))
		}
		fmt.Fprintf(w, "\t%s\n", oneLine(s.err))
	}
	if err := w.Flush(); err != nil {
		out.Close()
		return err
	}
	return out.Close()
}
