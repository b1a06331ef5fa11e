package main

import (
	"context"
	"fmt"
	"math"
	"time"

	"labelweir/filter/cmd/labelweir/internal/judge/metric"
	"labelweir/filter/cmd/labelweir/internal/judge/panel"
	"labelweir/model"
)

// nearCertain is the score from which the baselines' prec95, rec95 and share95 count.
const nearCertain = 0.95

// fitter judges the rows of a table, each without having seen its label.
type fitter func(ctx context.Context, t *model.Table) ([]model.Score, *model.Facts, error)

// fitModel fits the product's model on one core.
func fitModel(ctx context.Context, t *model.Table) ([]model.Score, *model.Facts, error) {
	o := model.DefaultOptions()
	o.Workers = 1
	r, err := model.NewTrainer(o).Fit(ctx, t)
	if err != nil {
		return nil, nil, err
	}
	return r.Scores, r.Snapshot.Facts(), nil
}

// figures is what one cell gave. Figures without a value are NaN.
type figures struct {
	table string
	cell  panel.Cell
	rows  int
	rate  float64 // planted share of wrong labels
	err   error   // why there are no figures

	ap                float64
	calibration       metric.Calibration
	held, near        metric.Cut // score at or above the snapshot's threshold; at or above nearCertain
	threshold         float64
	share             model.Estimate
	flipMax, flipMean float64 // difference of estimated and planted flip rates, over all pairs of classes
	unscored          int
	seconds           float64
	choice            model.Choice
	noiseModel        string
}

// judgeCell fits one cell and measures what came out; a panic of the model becomes the cell's error.
func judgeCell(ctx context.Context, j job, fit fitter) (f figures) {
	f = figures{table: j.table.Name, cell: j.cell, rate: math.NaN()}
	defer func() {
		if p := recover(); p != nil {
			f.err = fmt.Errorf("panic: %v", p)
		}
	}()
	if f.err = ctx.Err(); f.err != nil {
		return f
	}
	c, err := j.table.Case(j.cell)
	if err != nil {
		f.err = err
		return f
	}
	f.rows, f.rate = c.Input.Rows(), c.Share
	start := time.Now()
	scores, facts, err := fit(ctx, c.Input)
	f.seconds = time.Since(start).Seconds()
	if err == nil && len(scores) != f.rows {
		err = fmt.Errorf("%d scores for %d rows", len(scores), f.rows)
	}
	if err != nil {
		f.err = err
		return f
	}
	f.measure(c, scores, facts)
	return f
}

// measure fills in the figures.
func (f *figures) measure(c *panel.Case, scores []model.Score, facts *model.Facts) {
	p := make([]float64, len(scores))
	for i, s := range scores {
		p[i] = s.P
		if math.IsNaN(s.P) {
			f.unscored++
		}
	}
	f.ap = metric.AveragePrecision(c.Wrong, p)
	f.calibration = metric.Calibrate(c.Wrong, p)
	f.threshold = facts.Threshold
	f.held = metric.CutAt(c.Wrong, p, facts.Threshold)
	f.near = metric.CutAt(c.Wrong, p, nearCertain)
	f.share = facts.Noise.Share
	f.flipMax, f.flipMean = flipError(c, facts)
	f.choice, f.noiseModel = facts.Choice, facts.Noise.Model
}

// flipError compares the estimated flip rates with the planted ones, over the classes that the snapshot learned.
func flipError(c *panel.Case, facts *model.Facts) (largest, mean float64) {
	if len(facts.Noise.Flip) != len(facts.Classes) {
		return math.NaN(), math.NaN()
	}
	at := make([]int32, len(c.Input.Classes)) // class of the input to class of the snapshot
	for i, name := range c.Input.Classes {
		at[i] = -1
		for k, learned := range facts.Classes {
			if learned == name {
				at[i] = int32(k)
			}
		}
	}
	translate := func(codes []int32) []int32 {
		out := make([]int32, len(codes))
		for i, code := range codes {
			out[i] = -1
			if code >= 0 {
				out[i] = at[code]
			}
		}
		return out
	}
	k := len(facts.Classes)
	planted := metric.FlipRates(translate(c.Truth), translate(c.Input.Labels), k)
	estimated := make([][]float64, k)
	for i := range estimated {
		estimated[i] = make([]float64, k)
		for j := range estimated[i] {
			estimated[i][j] = facts.Noise.Flip[i][j].Value
		}
	}
	return metric.MatrixError(estimated, planted)
}

// covers is 1 when the interval of the estimated share holds the planted share, else 0; NaN without figures.
func (f *figures) covers() float64 {
	switch {
	case f.err != nil:
		return math.NaN()
	case f.share.Low <= f.rate && f.rate <= f.share.High:
		return 1
	}
	return 0
}

// line tells of the cell in one line, as it is done.
func (f *figures) line() string {
	name := fmt.Sprintf("%s %s %d", f.table, f.cell.Plan, f.cell.Seed)
	if f.err != nil {
		return name + ": " + f.err.Error()
	}
	return fmt.Sprintf("%s: ap %s, ece %s, %.1f s", name, number(f.ap), number(f.calibration.Error()), f.seconds)
}
