package filter

import (
	"context"
	"math"

	"labelweir/model"
	"labelweir/window"
)

// slide reads the input once, with a window that slides over it. All that happens is tied to row numbers, so that the
// outcome does not depend on batches. For the n-th row in turn:
//
//  1. it enters the window,
//  2. the newest snapshot, which has not seen it, judges it for the breaker,
//  3. the row that came Hold rows before it is judged for good and decided,
//  4. if a retrain is due at n, it happens.
//
// Before the first snapshot step 2 is missing, and rows wait, as many as Bytes allows, instead of Hold rows.
type slide struct {
	*engine
	win *window.Window

	firstFit int64 // labelled rows at which the first retrain is due
	labelled int64 // rows so far that have a label
	due      int64 // row count at which the next retrain is due; 0: not known yet
	tried    int64 // row count at the last retrain, possible or not
	waiting  int64 // most rows that may wait; 0: not known yet

	since   int64 // row from which the newest change began; 0: none
	cutting bool  // retrains leave out the rows before since
}

func (e *engine) newSlide() (*slide, error) {
	c := e.s.Config
	p := window.Policy{Records: c.Records, Span: c.Span, Bytes: c.Bytes, Keep: window.Latest,
		Floor: window.Default().Floor, Seed: c.Seed}
	if c.Span != window.NoSpan {
		p.Keep = window.Uniform
	}
	w, err := window.New(p)
	if err != nil {
		return nil, err
	}
	return &slide{engine: e, win: w, firstFit: firstFit(c.Records)}, nil
}

// leastFirst is the fewest labelled rows the first snapshot is trained on, when the window holds that many.
const leastFirst = 500

// firstFit is the number of labelled rows at which the first retrain is due: a tenth of the window.
func firstFit(records int) int64 { return int64(min(records, max(leastFirst, records/10))) }

// slidingInput judges the input with a window that slides over it.
func (s *Sweep) slidingInput(ctx context.Context, watch *stopwatch, rec *recorder) (*Report, error) {
	source, err := s.Open(ctx)
	if err != nil {
		return nil, err
	}
	e := newEngine(ctx, s, watch, rec, -1)
	in := startReading(ctx, source, watch, s.Config.Span != window.NoSpan)
	sl, err := e.newSlide()
	if err == nil {
		err = sl.run(ctx, in)
	}
	err = both(err, in.stop())
	if failed := e.stop(); err == nil { // else err says the same, or what came before
		err = failed
	}
	if err != nil {
		return nil, err
	}
	r := e.report()
	r.Window.Kind, r.Window.SpanSeconds = "sliding", s.Config.Span.Seconds()
	r.Window.Sampled = e.fit != nil && e.fit.view.Stands > int64(len(e.fit.view.Rows))
	r.Notes = append(r.Notes, sl.notes()...)
	return r, nil
}

// run takes in all batches and decides all rows.
func (s *slide) run(ctx context.Context, in *readAhead) error {
	for b := range in.batches {
		s.take(b)
		if s.waiting == 0 {
			s.waiting = max(1, s.s.Config.Bytes/rowBytes(b.Table))
		}
		end := b.First + int64(b.Rows())
		for s.read < end {
			if err := s.step(ctx, b, s.upto(b)); err != nil {
				return err
			}
		}
		if err := s.handOn(); err != nil { // a batch without rows
			return err
		}
		s.progress("sweep", s.read, 0)
	}
	if in.err != nil {
		return in.err
	}
	if s.fit == nil && s.labelled > 0 && s.tried < s.read {
		if _, err := s.retrain(ctx); err != nil {
			return err
		}
	}
	return s.letGo(s.read)
}

// upto is where the segment that begins at s.read ends: at the batch's end, at the next retrain, or when it is long.
func (s *slide) upto(b *Batch) int64 {
	end := min(b.First+int64(b.Rows()), s.read+maxSegment)
	if s.due > 0 {
		return min(end, s.due)
	}
	missing := s.firstFit - s.labelled
	for i := s.read; i < end; i++ {
		if b.Table.Labels[i-b.First] >= 0 {
			if missing--; missing == 0 {
				return i + 1
			}
		}
	}
	return end
}

// step takes the rows from s.read to upto, all of them in b, the last batch, through the four steps.
func (s *slide) step(ctx context.Context, b *Batch, upto int64) error {
	lo, hi := int(s.read-b.First), int(upto-b.First)
	if err := s.win.Append(b.Table, b.First, b.Times, lo, hi); err != nil {
		return err
	}
	for _, l := range b.Table.Labels[lo:hi] {
		if l >= 0 {
			s.labelled++
		}
	}
	if err := s.decideSegment(upto); err != nil {
		return err
	}
	s.read = upto
	if s.due == 0 && s.labelled < s.firstFit || s.due > s.read {
		return nil
	}
	first := s.fit == nil
	ok, err := s.retrain(ctx)
	if err != nil {
		return err
	}
	s.due = s.read + s.pace()
	if first && ok { // the rows that waited for it
		return s.letGo(s.read - s.behind())
	}
	return nil
}

// behind is how many rows a row waits for now.
func (s *slide) behind() int64 {
	if s.fit == nil {
		return s.waiting
	}
	return min(int64(s.s.Config.Hold), s.waiting)
}

// decideSegment judges the rows that come in, up to upto, and those that leave, and goes through both side by side.
func (s *slide) decideSegment(upto int64) error {
	behind := s.behind()
	if err := s.judge(upto - behind); err != nil {
		return err
	}
	arrival := s.released
	if behind > 0 {
		if err := s.watchArrival(upto); err != nil {
			return err
		}
		arrival = s.arrival
	}
	next := s.read
	arrive := func(until int64) {
		for ; next < until; next++ {
			if s.fit != nil && s.breaker.change.arrive(next, &arrival[next-s.read]) {
				s.breaker.changed(next)
			}
		}
	}
	leaving := s.first
	err := s.release(upto-behind, func(i int) { arrive(min(upto, leaving+int64(i)+behind+1)) })
	arrive(upto)
	return err
}

// letGo judges and decides the rows up to upto by the newest snapshot.
func (s *slide) letGo(upto int64) error {
	for s.first < upto {
		end := min(upto, s.first+maxSegment)
		if err := s.judge(end); err != nil {
			return err
		}
		if err := s.release(end, nil); err != nil {
			return err
		}
	}
	return s.handOn()
}

// retrain fits a snapshot to the window as it is now.
func (s *slide) retrain(ctx context.Context) (bool, error) {
	c := &s.breaker.change
	if s.fit != nil && len(s.fit.view.Rows) > 0 && c.slice(s.fit.view.Rows[0]) {
		s.breaker.settled(s.read - 1)
	}
	c.next()
	s.tried = s.read
	v, cut := s.view()
	if cut && s.first < s.since { // rows from before the change are for the snapshot from before it
		if err := s.letGo(min(s.since, s.read)); err != nil {
			return false, err
		}
	}
	ok, err := s.train(ctx, v)
	c.caughtUp = c.caughtUp || ok && cut
	return ok, err
}

// pace is the number of rows to the retrain after this one.
func (s *slide) pace() int64 {
	c := s.s.Config
	if c.Retrain.Rows > 0 {
		return int64(c.Retrain.Rows)
	}
	stands := int64(c.Records)
	if s.fit != nil {
		stands = max(stands, s.fit.view.Stands)
	}
	return max(1, int64(math.Round(c.Retrain.Share*float64(stands))))
}

// rowBytes is what one row of the table takes in memory.
func rowBytes(t *model.Table) int64 {
	n := int64(8 + 8 + 4 + 4)
	for i := range t.Columns {
		if c := &t.Columns[i]; c.Kind == model.Category {
			n += 4
		} else {
			n += 8 * int64(c.Size)
		}
	}
	return n
}
