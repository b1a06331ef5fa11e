package model

import (
	"context"
	"fmt"
	"math"
	"math/rand/v2"
	"runtime"
	"slices"

	"labelweir/model/internal/noise"
)

// Options of a Trainer.
type Options struct {
	Folds     int     // parts of the window, 2 to 100, small windows twice as many; a row's judge did not see its part; default 5
	Seed      uint64  // of every random draw; default 1
	Precision float64 // share of truly wrong labels wanted among held-back rows, in (0.5, 1); default 0.95
	Workers   int     // goroutines; the result does not depend on it; default the number of cores
	Once      bool    // no fit follows that could start from this one: the same result in about half the memory; default false

	// Progress, if set, is told what is being done now: a phase's name and how far it is. It is called from one
	// goroutine at a time.
	Progress func(phase string, done, total int)
}

// MinRows is the fewest labelled rows a Trainer accepts, and MinClassRows the fewest rows of a class for it to be
// learned; rows of smaller classes are left out of training and scored NewClass.
const (
	MinRows      = 50
	MinClassRows = 5
)

// maxWarm is how many warm fits may follow a cold one: with slides of 5 % two windows have gone by, and the settings
// are searched again.
const maxWarm = 40

// DefaultOptions gives the defaults named in Options.
func DefaultOptions() Options {
	return Options{Folds: 5, Seed: 1, Precision: 0.95, Workers: runtime.GOMAXPROCS(0)}
}

// Result is what one training gives.
type Result struct {
	Snapshot *Snapshot
	Scores   []Score // one a row of the table, each by a model that did not see the row's own label
}

// Trainer fits snapshots to a window and keeps what the next fit can start from. It belongs to one goroutine.
type Trainer struct {
	opt   Options
	last  *fitting
	layer *noise.Layer
	warm  int    // warm fits since the last cold one
	rows  int    // rows of the last cold fit
	stage uint64 // fits so far: each has random streams of its own
}

// NewTrainer returns a trainer without a past. It panics on a number of folds out of range.
func NewTrainer(o Options) *Trainer {
	if o.Folds < 2 || o.Folds > 100 {
		panic(fmt.Sprintf("model: %d folds, want 2 to 100", o.Folds))
	}
	return &Trainer{opt: o}
}

// Fit trains on t, which it neither keeps nor changes. The first call searches features, λ and q (cold); later ones
// start from the last result (warm) while columns and classes stay the same and the number of rows is alike. Errors:
// ErrTable, ErrTooFew, ErrOneClass, or the context's.
func (tr *Trainer) Fit(ctx context.Context, t *Table) (*Result, error) {
	in, err := newIntake(t)
	if err != nil {
		return nil, err
	}
	in.data.Workers = tr.opt.Workers
	warm := tr.last != nil && tr.warm < maxWarm && tr.alike(len(in.rows)) && in.continues(tr.last.intake)
	var layer *noise.Layer
	var facts *noise.Facts
	var f *fitting
	if warm {
		in.carry(t, tr.last.intake)
		f = newFitting(in, tr.opt, tr.last)
		in.deal(len(f.folds) - 1)
		last := tr.layer
		if !slices.Equal(in.sources, tr.last.sources) {
			last = nil
		}
		layer, facts, err = f.warm(ctx, tr.stage, last)
	} else {
		in.encode(t, tr.opt.Seed)
		f = newFitting(in, tr.opt, nil)
		in.deal(len(f.folds) - 1)
		layer, facts, err = f.cold(ctx)
	}
	if err != nil {
		tr.last = nil // folds may be half done
		return nil, err
	}
	tr.stage++
	if tr.opt.Once {
		return f.result(t, layer, facts, warm), nil
	}
	tr.last, tr.layer = f, layer
	tr.warm++
	if !warm {
		tr.warm, tr.rows = 0, len(in.rows)
	}
	f.data.Old = nil
	return f.result(t, layer, facts, warm), nil
}

// alike tells whether settings searched on the rows of the last cold fit may do for n rows: when there are twice as many,
// or less than half, others may be better.
func (tr *Trainer) alike(n int) bool { return n < 2*tr.rows && 2*n >= tr.rows }

// result scores the table's rows out of fold and puts the snapshot together.
func (f *fitting) result(t *Table, layer *noise.Layer, facts *noise.Facts, warm bool) *Result {
	res := &Result{Scores: make([]Score, t.Rows())}
	for i := range res.Scores {
		res.Scores[i] = Score{P: math.NaN(), Margin: math.NaN(), Implied: -1, Reason: f.reason[i]}
	}
	members := f.members()
	data := f.subset(nil, members...)
	p := make([]float64, len(f.rows))
	j := layer.NewJudge()
	for i, r := range f.rows {
		src := -1
		if f.data.Source != nil {
			src = int(f.data.Source[i])
		}
		v := j.Row(members, i, int(f.data.Labels[i]), src)
		p[i] = v.Wrong
		res.Scores[r] = Score{P: v.Wrong, Margin: v.Margin, Implied: int32(v.Implied)}
	}
	rng := rand.New(rand.NewPCG(f.opt.Seed, 1<<33))
	s := f.snapshot(layer)
	s.facts = f.facts(layer, facts, warm)
	s.facts.Threshold = noise.Threshold(data, layer, p, f.opt.Precision, rng)
	s.seal()
	res.Snapshot = s
	return res
}
