package filter

import (
	"context"
	"fmt"

	"labelweir/window"
)

// sample is what the first reading of an input gives.
type sample struct {
	view  *window.View
	print fingerprint
	stats window.Stats
	part  bool // fewer rows are trained on than have a label
}

// sampleAll reads the whole input and samples it.
func (s *Sweep) sampleAll(ctx context.Context, watch *stopwatch) (sm *sample, err error) {
	c := s.Config
	w, err := window.New(window.Policy{Records: c.Records, Span: window.NoSpan, Bytes: c.Bytes, Keep: window.Uniform,
		Floor: window.Default().Floor, Seed: c.Seed})
	if err != nil {
		return nil, err
	}
	source, err := s.Open(ctx)
	if err != nil {
		return nil, err
	}
	in := startReading(ctx, source, watch, false)
	defer func() { err = both(err, in.stop()) }()
	sm = &sample{}
	for b := range in.batches {
		err = w.Append(b.Table, b.First, nil, 0, b.Rows())
		sm.print.add(b)
		b.Release()
		if err != nil {
			return nil, err
		}
		if s.Progress != nil {
			s.Progress("read", sm.print.rows, 0)
		}
	}
	if in.err != nil {
		return nil, in.err
	}
	sm.view, sm.stats = w.View(), w.Stats()
	sm.part = sm.stats.Arrived > int64(len(sm.view.Rows))
	return sm, nil
}

// wholeInput judges the input with all of it as one window: read and sample it, train once, read it again and judge.
func (s *Sweep) wholeInput(ctx context.Context, watch *stopwatch, rec *recorder) (*Report, error) {
	sm, err := s.sampleAll(ctx, watch)
	if err != nil {
		return nil, err
	}
	e := newEngine(ctx, s, watch, rec, sm.print.rows)
	err = e.trainAndJudge(ctx, sm)
	if failed := e.stop(); err == nil { // else err says the same, or what came before
		err = failed
	}
	if err != nil {
		return nil, err
	}
	r := e.report()
	if sm.part {
		r.Window.Sampled = true
		if n := sm.stats.Limit; n < s.Config.Records {
			r.Notes = append(r.Notes, fmt.Sprintf("the window holds %d rows, not %d, because of window.bytes", n, s.Config.Records))
		}
	}
	return r, nil
}

func (e *engine) trainAndJudge(ctx context.Context, sm *sample) error {
	if len(sm.view.Rows) > 0 {
		if _, err := e.train(ctx, sm.view); err != nil {
			return err
		}
	}
	source, err := e.s.Open(ctx)
	if err != nil {
		return err
	}
	in := startReading(ctx, source, e.watch, false)
	err = e.judgeAll(in, &sm.print)
	return both(err, in.stop())
}

// judgeAll reads the input a second time and decides every row.
func (e *engine) judgeAll(in *readAhead, before *fingerprint) error {
	var now fingerprint
	for b := range in.batches {
		e.take(b)
		now.add(b)
		if now.rows > before.rows {
			return &ChangedError{FirstRows: before.rows, SecondRows: now.rows}
		}
		for end := b.First + int64(b.Rows()); e.read < end; {
			e.read = min(end, e.read+maxSegment)
			if err := e.judge(e.read); err != nil {
				return err
			}
			if err := e.release(e.read, nil); err != nil {
				return err
			}
		}
		if err := e.handOn(); err != nil {
			return err
		}
		e.progress("score", now.rows, before.rows)
	}
	if in.err != nil {
		return in.err
	}
	if now.rows != before.rows || now.total() != before.total() {
		return &ChangedError{FirstRows: before.rows, SecondRows: now.rows}
	}
	return nil
}
