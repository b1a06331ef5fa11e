package filter

import (
	"context"

	"labelweir/model"
	"labelweir/window"
)

// maxSegment is the most rows that are judged in one go; it bounds scratch memory and does not show in the result.
const maxSegment = 1 << 16

// engine carries batches through: it queues them, has their rows judged by the newest fit, decides row by row in input
// order, and hands finished batches on. It belongs to the goroutine of Run.
type engine struct {
	s       *Sweep
	watch   *stopwatch
	judges  *judges
	rec     *recorder
	out     *writeBehind
	breaker *breaker
	tally   *tally

	fit     *trained // newest; nil: none yet
	pending []*item  // batches with rows that have no tag yet, oldest first
	first   int64    // number of the oldest row without a tag
	read    int64    // rows taken in so far

	arrival  []model.Score // scratch: scores of the rows that come in
	released []model.Score // scratch: scores of the rows that are decided
}

// newEngine makes one for an input of total rows, −1: not known, which one window holds whole or that slides along.
func newEngine(ctx context.Context, s *Sweep, watch *stopwatch, r *recorder, total int64) *engine {
	return &engine{s: s, watch: watch, rec: r, judges: startJudges(s.Config.Workers), out: startWriting(ctx, s.Sink, watch),
		breaker: newBreaker(s.Config, total), tally: newTally()}
}

// stop ends the goroutines; rows without a tag are given back undelivered. It returns the sink's error, if any.
func (e *engine) stop() error {
	e.judges.stop()
	err := e.out.finish()
	for _, it := range e.pending {
		it.batch.Release()
	}
	e.pending = nil
	return err
}

// take puts a batch at the end of the queue.
func (e *engine) take(b *Batch) {
	e.pending = append(e.pending, e.out.item(b))
	e.tally.in += int64(b.Rows())
}

// watchArrival has the rows from e.read to upto, of the last batch, judged by the fit of the moment; they are fresh to
// it. Nothing happens while there is none.
func (e *engine) watchArrival(upto int64) error {
	e.arrival = grow(e.arrival, int(upto-e.read))
	if e.fit == nil {
		return nil
	}
	b := e.pending[len(e.pending)-1].batch
	start := e.watch.now()
	defer e.watch.add("score", start)
	return e.rec.score(streamArrivals, e.judges, e.fit, b.Table, b.First, int(e.read-b.First), int(upto-b.First), e.arrival)
}

// judge has the rows from e.first to upto judged by the newest fit, whichever batches they are in.
func (e *engine) judge(upto int64) error {
	e.released = grow(e.released, int(max(0, upto-e.first)))
	if e.fit == nil {
		return nil
	}
	start := e.watch.now()
	defer e.watch.add("score", start)
	for _, it := range e.pending {
		b := it.batch
		lo, hi := max(e.first, b.First), min(upto, b.First+int64(b.Rows()))
		if lo >= hi {
			continue
		}
		dst := e.released[lo-e.first : hi-e.first]
		if err := e.rec.score(streamDecided, e.judges, e.fit, b.Table, b.First, int(lo-b.First), int(hi-b.First), dst); err != nil {
			return err
		}
	}
	return nil
}

// decide gives the oldest row without a tag its tag. s is its score, not looked at while there is no fit.
func (e *engine) decide(it *item, s *model.Score) {
	b, i := it.batch, it.decided
	row, label := b.First+int64(i), b.Table.Labels[i]
	var t Tag
	switch {
	case label < 0:
		t = unscored(model.NoLabel)
	case e.fit == nil:
		t = unscored(model.WarmingUp)
	default:
		t = e.fit.verdict(s)
		if t.Reason == model.Scored && e.breaker.change.doubts(row) {
			t = unscored(model.InputsChanged)
		}
	}
	t.Divert = e.breaker.hold(row, label, t.Verdict, b.Table.Classes)
	it.tags[i] = t
	it.decided++
	e.first++
	e.tally.count(&t)
}

// release decides the rows up to upto, which judge has seen, and hands finished batches on. between, if set, is called
// before each row with its place among them.
func (e *engine) release(upto int64, between func(i int)) error {
	from, i := e.first, 0
	for k := 0; e.first < upto; {
		it := e.pending[k]
		if it.decided == len(it.tags) {
			k++
			continue
		}
		if between != nil {
			between(i)
		}
		e.decide(it, &e.released[e.first-from])
		i++
	}
	return e.handOn()
}

// handOn passes the finished batches at the head of the queue on.
func (e *engine) handOn() error {
	done := 0
	for _, it := range e.pending {
		if it.decided < len(it.tags) {
			break
		}
		done++
		if err := e.out.put(it); err != nil {
			e.pending = e.pending[done:]
			return err
		}
	}
	e.pending = append(e.pending[:0], e.pending[done:]...)
	return nil
}

// train trains on the view and takes the fit over. It tells whether there is a new one; when the rows are not
// enough there is none, the reason is noted, and the one before stays.
func (e *engine) train(ctx context.Context, v *window.View) (bool, error) {
	e.watch.enter("fit")
	fit, err := e.rec.train(ctx, v, e.read)
	e.watch.enter("")
	if little, ok := err.(*tooLittle); ok {
		e.tally.failed(e.read, little)
		return false, nil
	}
	if err != nil {
		return false, err
	}
	e.fit = fit
	e.tally.fitted(e.fit)
	e.breaker.change.fitted(fit.disagree, fit.scored)
	if e.s.OnSnapshot != nil && fit.snapshot != nil {
		e.s.OnSnapshot(fit.snapshot)
	}
	return true, nil
}

func (e *engine) progress(phase string, done, total int64) {
	if e.s.Progress != nil {
		e.s.Progress(phase, done, total)
	}
}

// grow gives a slice of n entries, the old one if it is long enough.
func grow(s []model.Score, n int) []model.Score {
	if cap(s) < n {
		return make([]model.Score, n)
	}
	return s[:n]
}
