package main

import (
	"context"
	"fmt"
	"math"
	"path/filepath"
	"slices"
	"time"

	"labelweir/connectors/arrowfile"
	"labelweir/connectors/table"
	"labelweir/filter"
	"labelweir/filter/cmd/labelweir/internal/judge/metric"
	"labelweir/filter/cmd/labelweir/internal/judge/panel"
)

// bounds are the row numbers between the parts of a stream that figures are taken over.
type bounds struct {
	first   int // the rows before have no figures
	turn    int // where the concept or a source changes, if it does so at once
	settled int // where the change is as old as a window
}

// sliding is how a stream is gone through.
type sliding struct {
	window, hold int
	retrain      float64 // share of the window
	bounds       bounds
	rows         string // folder for the rows with their scores; empty: none
}

// standardBounds are those of the baselines.
func standardBounds() bounds { return bounds{first: 3000, turn: 10000, settled: 13000} }

// config gives the settings of the sweep, on one core.
func (s sliding) config() filter.Config {
	c := filter.Default()
	c.Sliding, c.Records, c.Hold, c.Workers = true, s.window, s.hold, 1
	c.Retrain = filter.Every{Share: s.retrain}
	c.Mode = filter.Divert
	return c
}

// streamFigures is what one stream gave. Figures without a value are NaN.
type streamFigures struct {
	stream string
	err    error // why there are no figures

	parts       [4]float64 // average precision from first on, up to turn, from turn to settled, and later
	calibration metric.Calibration
	fold        metric.Calibration // of the scores the same rows have out of fold, in the first fit that saw them
	foldAP      float64
	near        metric.Cut
	held, sure  metric.Cut // diverted; with the verdict quarantine
	rows        int        // rows that the figures are taken over
	unscored    int        // of them
	seconds     float64
	trained     *watched
	report      *filter.Report
}

// judgeStream goes through one stream; a panic on this goroutine becomes the stream's error.
func judgeStream(ctx context.Context, s *panel.Stream, how sliding) (f streamFigures) {
	f = streamFigures{stream: s.Name}
	defer func() {
		if p := recover(); p != nil {
			f.err = fmt.Errorf("panic: %v", p)
		}
	}()
	if f.err = ctx.Err(); f.err != nil {
		return f
	}
	c := how.config()
	sink, fold := &tags{}, make([]float64, len(s.Wrong))
	f.trained = newWatched(c, fold)
	sweep := filter.Sweep{Config: c, Sink: sink, Learner: f.trained, Open: func(context.Context) (filter.Source, error) {
		return arrowfile.Open(s.Path, s.Record, table.DefaultOptions())
	}}
	start := time.Now()
	f.report, f.err = sweep.Run(ctx)
	f.seconds = time.Since(start).Seconds()
	if f.err == nil && len(sink.list) != len(s.Wrong) {
		f.err = fmt.Errorf("%d tags for %d rows", len(sink.list), len(s.Wrong))
	}
	if f.err == nil {
		f.measure(how.bounds, s.Wrong, sink.list, fold)
		if how.rows != "" {
			f.err = writeRows(filepath.Join(how.rows, s.Name+".tsv"), s.Wrong, sink.list, fold)
		}
	}
	return f
}

// measure fills in the figures. fold holds the scores out of fold.
func (f *streamFigures) measure(b bounds, wrong []bool, list []filter.Tag, fold []float64) {
	p := make([]float64, len(list))
	held, sure := make([]float64, len(list)), make([]float64, len(list))
	for i, t := range list {
		p[i] = t.Score
		if t.Divert {
			held[i] = 1
		}
		if t.Verdict == filter.Quarantine {
			sure[i] = 1
		}
	}
	n := len(list)
	from, turn, settled := min(b.first, n), min(b.turn, n), min(b.settled, n)
	for k, r := range [4][2]int{{from, n}, {from, turn}, {turn, settled}, {settled, n}} {
		f.parts[k] = metric.AveragePrecision(wrong[r[0]:r[1]], p[r[0]:r[1]])
	}
	wrong, p, fold = wrong[from:], p[from:], slices.Clone(fold[from:])
	for i := range p {
		if math.IsNaN(p[i]) {
			f.unscored++
		}
		if math.IsNaN(p[i]) || math.IsNaN(fold[i]) { // not comparable; the last rows were in no fit
			fold[i] = p[i]
		}
	}
	f.rows = len(p)
	f.calibration, f.fold = metric.Calibrate(wrong, p), metric.Calibrate(wrong, fold)
	f.foldAP = metric.AveragePrecision(wrong, fold)
	f.near = metric.CutAt(wrong, p, nearCertain)
	f.held, f.sure = metric.CutAt(wrong, held[from:], 1), metric.CutAt(wrong, sure[from:], 1)
}

// line tells of the stream in one line, as it is done.
func (f *streamFigures) line() string {
	if f.err != nil {
		return f.stream + ": " + f.err.Error()
	}
	return fmt.Sprintf("%s: ap %s, ece %s, %.1f s", f.stream, number(f.parts[0]), number(f.calibration.Error()), f.seconds)
}
