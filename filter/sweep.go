package filter

import (
	"context"
	"errors"
	"time"
)

// Sweep is one pass over a stored input: every record is judged once, tagged, and delivered in order to the sink.
//
// Open, Sink and Config are required. A Sweep is used for one Run.
type Sweep struct {
	Config Config

	// Open starts a new reading of the input from its beginning. A sweep with the whole input as one window reads it
	// twice, one with a sliding window once; at most one reading is open at a time.
	Open func(context.Context) (Source, error)

	Sink    Sink    // Run calls Commit once everything is delivered, and Close in any case
	Learner Learner // nil: a model.Trainer with the configured seed, precision and workers

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
func (s *Sweep) Run(ctx context.Context) (*Report, error) {
	if err := s.Config.Validate(); err != nil {
		return nil, errors.Join(err, s.Sink.Close())
	}
	return nil, errors.Join(errors.New("sweep is not written yet"), s.Sink.Close())
}
