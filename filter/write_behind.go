package filter

import (
	"context"
	"sync/atomic"
)

// item is a batch on its way, with the tags given so far.
type item struct {
	batch   *Batch
	tags    []Tag
	decided int // rows that have their tag
}

// writeBehind delivers batches in a goroutine of its own, in the order in which they are put, and gives them back.
type writeBehind struct {
	items  chan *item // two: one ready while the one before is being written
	spare  chan *item // delivered ones, for their memory; as many as can be under way
	failed chan struct{}
	done   chan struct{}
	err    error // valid once failed or done is closed

	tagged, held atomic.Int64 // rows delivered
}

// startWriting takes sink over until finish returns.
func startWriting(ctx context.Context, sink Sink, watch *stopwatch) *writeBehind {
	w := &writeBehind{
		items: make(chan *item, 2), spare: make(chan *item, 4),
		failed: make(chan struct{}), done: make(chan struct{}),
	}
	go func() {
		defer close(w.done)
		for it := range w.items {
			if w.err == nil {
				w.deliver(ctx, sink, it, watch)
			}
			it.batch.Release()
			it.batch = nil
			select {
			case w.spare <- it:
			default: // enough of them are there
			}
		}
	}()
	return w
}

func (w *writeBehind) deliver(ctx context.Context, sink Sink, it *item, watch *stopwatch) {
	start := watch.now()
	err := sink.Deliver(ctx, it.batch, it.tags)
	watch.add("write", start)
	if err != nil {
		w.err = err
		close(w.failed)
		return
	}
	held := int64(0)
	for i := range it.tags {
		if it.tags[i].Divert {
			held++
		}
	}
	w.held.Add(held)
	w.tagged.Add(int64(len(it.tags)) - held)
}

// item gives one for b, with room for its tags.
func (w *writeBehind) item(b *Batch) *item {
	var it *item
	select {
	case it = <-w.spare:
	default:
		it = new(item)
	}
	n := b.Rows()
	if cap(it.tags) < n {
		it.tags = make([]Tag, n)
	}
	it.batch, it.tags, it.decided = b, it.tags[:n], 0
	return it
}

// put hands over an item, all of whose rows have their tag. It blocks while two are waiting, and returns the error of
// an earlier delivery.
func (w *writeBehind) put(it *item) error {
	select {
	case w.items <- it:
		return nil
	case <-w.failed:
		it.batch.Release()
		return w.err
	}
}

// finish waits until everything put is delivered.
func (w *writeBehind) finish() error {
	close(w.items)
	<-w.done
	return w.err
}
