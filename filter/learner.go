package filter

import (
	"context"
	"io"

	"labelweir/model"
)

// Learner fits snapshots to windows, one call at a time. An error that is model.ErrTooFew or model.ErrOneClass says
// that the rows are not enough, and the run goes on without; any other ends the run.
type Learner interface {
	// Fit trains on t, which it neither keeps nor changes.
	Fit(ctx context.Context, t *model.Table) (*Fit, error)
}

// Fit is what one training gives.
type Fit struct {
	Snapshot Snapshot
	Scores   []model.Score // one a row of the table, each by a model that did not see the row's own label
}

// Snapshot is one trained, immutable scorer. All methods may be called from several goroutines.
type Snapshot interface {
	ID() string
	Facts() *model.Facts // not to be changed
	NewScorer() Scorer
	io.WriterTo // saves it
}

// Scorer judges rows its snapshot was not trained on. It belongs to one goroutine.
type Scorer interface {
	// Score writes into dst[i−lo] what the snapshot says of rows lo ≤ i < hi of t.
	Score(t *model.Table, lo, hi int, dst []model.Score) error
}

// NewLearner returns the Learner that trains with tr.
func NewLearner(tr *model.Trainer) Learner { return learner{tr} }

type learner struct{ tr *model.Trainer }

func (l learner) Fit(ctx context.Context, t *model.Table) (*Fit, error) {
	r, err := l.tr.Fit(ctx, t)
	if err != nil {
		return nil, err
	}
	return &Fit{Snapshot: snapshot{r.Snapshot}, Scores: r.Scores}, nil
}

// Skip implements Resumer.
func (l learner) Skip(n uint64) { l.tr.Skip(n) }

// Load implements Resumer.
func (l learner) Load(r io.Reader) (Snapshot, error) {
	s, err := model.ReadSnapshot(r)
	if err != nil {
		return nil, err
	}
	return snapshot{s}, nil
}

// snapshot turns a *model.Snapshot into a Snapshot; only NewScorer differs in its result.
type snapshot struct{ *model.Snapshot }

func (s snapshot) NewScorer() Scorer { return s.Snapshot.NewScorer() }
