package main

import (
	"context"
	"math"
	"time"

	"labelweir/filter"
	"labelweir/model"
)

// tags is a filter.Sink that keeps all tags in row order.
type tags struct{ list []filter.Tag }

func (s *tags) Deliver(ctx context.Context, _ *filter.Batch, t []filter.Tag) error {
	s.list = append(s.list, t...)
	return ctx.Err()
}

func (s *tags) Commit(context.Context) error { return nil }
func (s *tags) Close() error                 { return nil }

// watched is a filter.Learner that notes how long each fit took and what it said, out of fold, of the rows it was
// trained on.
type watched struct {
	filter.Learner
	cold, warm         int
	coldTime, warmTime time.Duration
	rows               map[uint64]int // row number by key
	fold               []float64      // by row: the score out of fold in the first fit that saw the row; NaN: in none
}

// newWatched trains as a filter.Sweep without a Learner would.
func newWatched(c filter.Config, fold []float64) *watched {
	o := model.DefaultOptions()
	o.Seed, o.Precision, o.Workers = c.Seed, c.Precision, c.Workers
	w := &watched{Learner: filter.NewLearner(model.NewTrainer(o)), rows: make(map[uint64]int, len(fold)), fold: fold}
	for i := range fold {
		w.rows[model.Key(int64(i))] = i
		fold[i] = math.NaN()
	}
	return w
}

func (w *watched) Fit(ctx context.Context, t *model.Table) (*filter.Fit, error) {
	start := time.Now()
	f, err := w.Learner.Fit(ctx, t)
	if err != nil {
		return nil, err
	}
	if f.Snapshot.Facts().Warm {
		w.warm++
		w.warmTime += time.Since(start)
	} else {
		w.cold++
		w.coldTime += time.Since(start)
	}
	for i, key := range t.Keys {
		if r, ok := w.rows[key]; ok && math.IsNaN(w.fold[r]) {
			w.fold[r] = f.Scores[i].P
		}
	}
	return f, nil
}
