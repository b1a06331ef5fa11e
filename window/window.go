package window

import (
	"fmt"
	"slices"

	"labelweir/model"
)

// maxBlockRows is the most rows of a block: enough that copying a column of it is one long run, few enough that a
// block half empty does not matter.
const maxBlockRows = 1024

// minRows is the fewest rows that must fit Policy.Bytes.
const minRows = 64

// Window is a bounded sample of the rows appended to it. It belongs to one goroutine; the views it gives do not.
type Window struct {
	policy  Policy
	columns []model.Column // without values; nil before the first row
	levels  []names        // by column
	classes names
	sources names
	sourced bool // some table had sources

	blockRows int
	maxBlocks int
	blocks    []*block // in order of arrival; all but the last one are full
	free      []*block
	head      int // rows at the start of blocks[0] that have left
	stored    int // rows in blocks, those that have left not counted
	limit     int // most rows of a view: Policy.Records, or what Bytes allows
	next      int // Uniform: number of stored rows at which those that can't be drawn any more are dropped

	bar      uint64   // NoSpan: a row that draws less than this
	classBar []uint64 // and less than this, by class, need not come in

	clock    clock
	last     int64  // number of the row appended last
	seen     []bool // by class: whether a row of it has arrived
	nSeen    int
	arrived  int64
	late     int64
	ahead    int64
	rowIndex []int32 // scratch: rows of the table that go into the current block
}

// New returns an empty window. The error wraps ErrPolicy.
func New(p Policy) (*Window, error) {
	if err := p.Validate(); err != nil {
		return nil, err
	}
	return &Window{policy: p, limit: p.Records, clock: clock{now: unknown}, last: -1}, nil
}

// Policy gives the bounds the window was made with.
func (w *Window) Policy() Policy { return w.policy }

// Stats counts what has gone into a window and what is there.
type Stats struct {
	Arrived int64 // labelled rows appended
	Late    int64 // of them, those that were already older than the span and were left out
	Ahead   int64 // of them, those whose time lay more than a span ahead of the others; the present was taken instead
	Stored  int   // rows stored now; with Uniform these can be more than a view has
	Limit   int   // most rows of a view now: Policy.Records, or fewer when Bytes does not allow as many
	Bytes   int64 // of the stored blocks
}

// Stats gives the counts.
func (w *Window) Stats() Stats {
	var bytes int64
	if w.columns != nil {
		bytes = int64(len(w.blocks)+len(w.free)) * int64(w.blockRows) * rowBytes(w.columns)
	}
	return Stats{Arrived: w.arrived, Late: w.late, Ahead: w.ahead, Stored: w.stored, Limit: w.limit, Bytes: bytes}
}

// Append adds the rows lo ≤ i < hi of t; row i has the number first+i, and numbers rise from call to call. Rows without
// a label are passed over. times has one entry a row of t, in nanoseconds since 1970 with −1<<63 for none, or is nil; a
// row without a time counts as of the present. t is not kept, but for its lists of names. What is kept depends on the
// rows alone, not on how they are split into calls. Errors: ErrColumns, ErrBytes; the window is as it was then.
func (w *Window) Append(t *model.Table, first int64, times []int64, lo, hi int) error {
	if err := w.match(t); err != nil {
		return err
	}
	if lo < hi && first+int64(lo) <= w.last {
		panic(fmt.Sprintf("window: row %d appended after row %d", first+int64(lo), w.last))
	}
	for i := lo; i < hi; {
		b := w.tail()
		at := len(b.rows)
		i = w.admit(b, t, first, times, i, hi)
		w.fill(b, t)
		w.stored += len(b.rows) - at
		w.evict()
	}
	return nil
}

// match compares the columns of t with the window's, or takes them over if they are the first.
func (w *Window) match(t *model.Table) error {
	if w.columns == nil {
		if err := w.begin(t.Columns); err != nil {
			return err
		}
	}
	if len(t.Columns) != len(w.columns) {
		return fmt.Errorf("%w: %d columns instead of %d", ErrColumns, len(t.Columns), len(w.columns))
	}
	for i := range t.Columns {
		c, own := &t.Columns[i], &w.columns[i]
		if c.Name != own.Name || c.Kind != own.Kind || c.Size != own.Size {
			return fmt.Errorf("%w: %q is %v of size %d instead of %q, %v of size %d", ErrColumns,
				c.Name, c.Kind, c.Size, own.Name, own.Kind, own.Size)
		}
	}
	for i := range t.Columns {
		w.levels[i].adopt(t.Columns[i].Levels)
	}
	w.classes.adopt(t.Classes)
	w.sources.adopt(t.SourceNames)
	w.sourced = w.sourced || t.Sources != nil
	return nil
}

// begin takes over the columns and divides Bytes into blocks.
func (w *Window) begin(columns []model.Column) error {
	size := rowBytes(columns)
	rows := w.policy.Bytes / size
	if rows < minRows {
		return fmt.Errorf("%w: a row takes %d bytes, at least %d rows must fit, and there are %d bytes", ErrBytes,
			size, minRows, w.policy.Bytes)
	}
	w.columns = make([]model.Column, len(columns))
	for i, c := range columns {
		w.columns[i] = model.Column{Name: c.Name, Kind: c.Kind, Size: c.Size}
	}
	w.levels = make([]names, len(columns))
	w.blockRows = int(min(maxBlockRows, rows/8))
	w.maxBlocks = int(min(rows/int64(w.blockRows), 1<<20))
	switch {
	case w.policy.Keep == Latest: // the first and the last block may be partly empty, and one more is being filled
		w.limit = min(w.limit, (w.maxBlocks-2)*w.blockRows)
	case w.policy.Span == NoSpan: // with the floors one and a half times the limit are stored after thinning
		w.limit = min(w.limit, w.maxRows()/2)
	}
	w.next = min(w.maxRows(), w.limit+w.slack(w.limit))
	return nil
}

// maxRows is the most rows that may be stored.
func (w *Window) maxRows() int { return w.maxBlocks * w.blockRows }

// slack is how many rows are let in above n before the sample is thinned again: a quarter, so that thinning costs a
// row O(log n).
func (w *Window) slack(n int) int { return max(w.blockRows, n/4) }

// tail gives the last block with room for a row.
func (w *Window) tail() *block {
	if n := len(w.blocks); n > 0 && len(w.blocks[n-1].rows) < w.blockRows {
		return w.blocks[n-1]
	}
	var b *block
	if n := len(w.free); n > 0 {
		b, w.free = w.free[n-1], w.free[:n-1]
		b.stretch(0)
	} else {
		b = newBlock(w.columns, w.blockRows)
	}
	w.blocks = append(w.blocks, b)
	return b
}

// admit decides which of the rows i ≤ … < hi of t go into b, writes what belongs to the row as a whole, lists them in
// rowIndex, and returns the first row not looked at. It stops when b is full or the sample must be thinned.
func (w *Window) admit(b *block, t *model.Table, first int64, times []int64, i, hi int) int {
	w.rowIndex = w.rowIndex[:0]
	room := w.blockRows - len(b.rows)
	if w.policy.Keep == Uniform {
		room = min(room, w.next-w.stored)
	}
	for ; i < hi && len(w.rowIndex) < room; i++ {
		w.last = first + int64(i)
		if t.Labels[i] < 0 {
			continue
		}
		w.arrived++
		at, ok := w.timeOf(b, times, i)
		if !ok {
			w.late++
			continue
		}
		source := int32(-1)
		if t.Sources != nil {
			source = w.sources.code(t.Sources[i])
		}
		label := w.classes.code(t.Labels[i])
		w.see(label)
		if w.policy.Keep == Uniform && w.hopeless(label, t.Keys[i]) {
			continue
		}
		w.rowIndex = append(w.rowIndex, int32(i))
		b.rows, b.times, b.keys = append(b.rows, w.last), append(b.times, at), append(b.keys, t.Keys[i])
		b.labels, b.sources = append(b.labels, label), append(b.sources, source)
	}
	return i
}

// timeOf gives the time that row i counts with; false when it is too old to come in.
func (w *Window) timeOf(b *block, times []int64, i int) (int64, bool) {
	if w.policy.Span == NoSpan || times == nil {
		return w.clock.now, true
	}
	t := times[i]
	if w.clock.see(t) {
		w.settle()
	}
	switch {
	case t == unknown:
		return w.clock.now, true
	case w.clock.wild(t, w.policy.Span):
		w.ahead++
		return w.clock.now, true
	}
	return t, !w.clock.old(t, w.policy.Span)
}

// settle gives the rows that came before the present was known, and had no believable time, the present.
func (w *Window) settle() {
	for _, b := range w.blocks {
		for i, t := range b.times {
			if t == unknown {
				b.times[i] = w.clock.now
			} else if w.clock.wild(t, w.policy.Span) {
				w.ahead++
				b.times[i] = w.clock.now
			}
		}
	}
}

// see notes that a row of the class has arrived.
func (w *Window) see(class int32) {
	for int(class) >= len(w.seen) {
		w.seen = append(w.seen, false)
	}
	if !w.seen[class] {
		w.seen[class] = true
		w.nSeen++
	}
}

// fill copies the columns of the rows in rowIndex to the end of b.
func (w *Window) fill(b *block, t *model.Table) {
	for c := range w.columns {
		from, size := &t.Columns[c], w.columns[c].Size
		switch {
		case b.codes[c] != nil:
			n := &w.levels[c]
			for _, i := range w.rowIndex {
				b.codes[c] = append(b.codes[c], n.code(from.Codes[i]))
			}
		case size == 1:
			for _, i := range w.rowIndex {
				b.values[c] = append(b.values[c], from.Values[i])
			}
		default:
			for _, i := range w.rowIndex {
				b.values[c] = append(b.values[c], from.Values[int(i)*size:(int(i)+1)*size]...)
			}
		}
	}
}

// evict lets go what must not or need not be stored any longer.
func (w *Window) evict() {
	if w.policy.Keep == Uniform {
		if w.stored >= w.next {
			w.thin()
		}
		return
	}
	for w.stored > w.limit {
		b := w.blocks[0]
		n := min(w.stored-w.limit, len(b.rows)-w.head)
		w.head += n
		w.stored -= n
		if w.head == len(b.rows) && len(b.rows) == w.blockRows {
			w.free = append(w.free, b)
			w.blocks = slices.Delete(w.blocks, 0, 1)
			w.head = 0
		}
	}
}
