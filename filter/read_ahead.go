package filter

import (
	"context"
	"errors"
	"fmt"
	"io"
)

// readAhead reads an input in a goroutine of its own. The batches come out of a channel in input order; the goroutine
// ends at the input's end, at an error, or when stop is called, which must happen once.
type readAhead struct {
	batches chan *Batch // two ahead: one that is ready while the next is being read
	err     error       // why batches was closed; nil at the input's end; valid then
	source  Source
	cancel  context.CancelFunc
}

// startReading takes over source.
func startReading(ctx context.Context, source Source, watch *stopwatch, timed bool) *readAhead {
	ctx, cancel := context.WithCancel(ctx)
	r := &readAhead{batches: make(chan *Batch, 2), source: source, cancel: cancel}
	go func() {
		defer close(r.batches)
		r.err = r.run(ctx, watch, timed)
	}()
	return r
}

func (r *readAhead) run(ctx context.Context, watch *stopwatch, timed bool) error {
	next := int64(0)
	for {
		start := watch.now()
		b, err := r.source.Next(ctx)
		watch.add("read", start)
		if errors.Is(err, io.EOF) {
			return nil
		}
		if err != nil {
			return err
		}
		if err := checkBatch(b, next, timed); err != nil {
			b.Release()
			return err
		}
		next += int64(b.Rows())
		select {
		case r.batches <- b:
		case <-ctx.Done():
			b.Release()
			return context.Cause(ctx)
		}
	}
}

// checkBatch holds a source to its promises.
func checkBatch(b *Batch, next int64, timed bool) error {
	n := b.Rows()
	switch {
	case b.First != next:
		return fmt.Errorf("%w: row %d comes after row %d", ErrBatch, b.First, next-1)
	case len(b.Table.Keys) != n:
		return fmt.Errorf("%w: batch at row %d has %d keys for %d rows", ErrBatch, b.First, len(b.Table.Keys), n)
	case b.Times != nil && len(b.Times) != n:
		return fmt.Errorf("%w: batch at row %d has %d times for %d rows", ErrBatch, b.First, len(b.Times), n)
	case timed && b.Times == nil && n > 0:
		return ErrNoTime
	}
	return nil
}

// stop ends the reading, gives back what was read and not taken, and closes the source.
func (r *readAhead) stop() error {
	r.cancel()
	for b := range r.batches {
		b.Release()
	}
	return r.source.Close()
}
