package filter

import (
	"context"
	"errors"
	"fmt"
	"time"

	"labelweir/model"
)

// Sweep is one pass over a stored input: every record is judged once, tagged, and delivered in order to the sink.
//
// Open, Sink and Config are required. A Sweep is used for one Run.
type Sweep struct {
	Config Config

	// Open starts a new reading of the input from its beginning. A sweep with the whole input as one window reads it
	// twice, one with a sliding window once; at most one reading is open at a time, and Run closes it.
	Open func(context.Context) (Source, error)

	// Sink is called from one goroutine at a time. Run calls Commit once everything is delivered, and Close in any case.
	Sink Sink

	Learner Learner // nil: a model.Trainer with the configured seed, precision and workers

	// Journal, if set, is where what was trained and judged is kept, and taken from when an interrupted sweep left it
	// there. The Learner must be a Resumer then.
	Journal *Journal

	// Progress, if set, is told what is being done: a phase's name, how much is done and of how much, 0 when not
	// known. It is called from one goroutine at a time.
	Progress func(phase string, done, total int64)

	// OnSnapshot, if set, is given each snapshot once it is fitted.
	OnSnapshot func(Snapshot)

	// Now is the clock behind the report's times; it may be called from several goroutines; nil: time.Now.
	Now func() time.Time
}

// Run sweeps. It returns when everything it started has ended. The report is there when the error is nil. Errors:
// those of Config.Validate, of the source, the sink and the learner as they are; ErrChanged, ErrNoTime, ErrBatch.
// After an error nothing was committed, unless it is Commit's or Close's own.
func (s *Sweep) Run(ctx context.Context) (*Report, error) {
	r, err := s.run(ctx)
	if err == nil {
		err = s.Sink.Commit(ctx)
	}
	if err != nil && ctx.Err() != nil { // every part has noticed it; once is enough
		err = context.Cause(ctx)
	}
	if err = both(err, s.Sink.Close()); err != nil {
		return nil, err
	}
	return r, nil
}

// both joins two errors, and leaves one alone as it is.
func both(a, b error) error {
	switch {
	case a == nil:
		return b
	case b == nil:
		return a
	}
	return errors.Join(a, b)
}

func (s *Sweep) run(ctx context.Context) (*Report, error) {
	if err := s.Config.Validate(); err != nil {
		return nil, err
	}
	now := s.Now
	if now == nil {
		now = time.Now
	}
	watch := newStopwatch(now)
	l := s.Learner
	if l == nil {
		l = s.trainer(watch)
	}
	rec, err := newRecorder(l, s.Journal, !s.Config.Sliding)
	if err != nil {
		return nil, err
	}
	judge := s.wholeInput
	if s.Config.Sliding {
		judge = s.slidingInput
	}
	r, err := judge(ctx, watch, rec)
	if err == nil {
		err = rec.end()
	}
	if err != nil {
		return nil, err
	}
	if n := r.Rows; n.In != n.Tagged+n.Quarantine+n.Unreadable {
		return nil, fmt.Errorf("filter: %d records came in, but %d tagged, %d held back and %d unreadable went out",
			n.In, n.Tagged, n.Quarantine, n.Unreadable)
	}
	return r, nil
}

// trainer makes the learner of the real model, which tells the stopwatch and Progress where it is.
func (s *Sweep) trainer(watch *stopwatch) Learner {
	o := model.DefaultOptions()
	o.Seed, o.Precision, o.Workers = s.Config.Seed, s.Config.Precision, s.Config.Workers
	o.Once = !s.Config.Sliding
	o.Progress = func(phase string, done, total int) {
		watch.enter("fit/" + phase)
		if s.Progress != nil {
			s.Progress(phase, int64(done), int64(total))
		}
	}
	return NewLearner(model.NewTrainer(o))
}
