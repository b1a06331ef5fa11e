package window

import (
	"cmp"
	"math"
	"slices"
)

// The sample is the rows with the highest priorities, a priority being a random number that each row draws once and for
// all: priority sampling on moving windows (Babcock, Datar & Motwani, SODA 2002, §3), taken without replacement. Of n
// rows in the span, those must be stored that may yet come into the sample: the rows with fewer than k later ones of
// higher priority, about k·(1 + ln(n/k)) of them. The draw is a hash of the row's key and the seed, so that a row has
// the same priority whenever and in whatever company it arrives.

// priority is the number that the row with this key draws, uniform over all 64-bit numbers: one more step of SplitMix64
// (Steele, Lea & Flood 2014) over key and seed.
func priority(seed, key uint64) uint64 {
	z := key ^ (seed+1)*0x9e3779b97f4a7c15
	z = (z ^ z>>30) * 0xbf58476d1ce4e5b9
	z = (z ^ z>>27) * 0x94d049bb133111eb
	return z ^ z>>31
}

// candidate is a stored row as the sampler sees it.
type candidate struct {
	priority uint64
	time     int64
	row      int64
	label    int32
	at       int32 // index among all stored rows
}

// above orders by priority, and by age where they are equal.
func (c *candidate) above(d *candidate) bool {
	return c.priority > d.priority || c.priority == d.priority && c.row > d.row
}

// candidates lists the stored rows that are within the span.
func (w *Window) candidates() []candidate {
	list := make([]candidate, 0, w.stored)
	at := int32(0)
	for _, b := range w.blocks {
		for i := range b.rows {
			if !w.clock.old(b.times[i], w.policy.Span) {
				list = append(list, candidate{priority(w.policy.Seed, b.keys[i]), b.times[i], b.rows[i], b.labels[i], at})
			}
			at++
		}
	}
	return list
}

// floor is the number of rows that each class may keep with a view of limit rows.
func (w *Window) floor() int { return min(w.policy.Floor, w.limit/(2*max(1, w.nSeen))) }

// thin drops the rows that can't come into the sample any more. If that does not make enough room within Bytes, it
// lowers the limit for good, so that what is left is still a uniform sample.
func (w *Window) thin() {
	list := w.candidates()
	slices.Reverse(list) // nearly sorted now, where rows come in order of time
	slices.SortFunc(list, w.outstays)
	list = w.undominated(list)
	for len(list) > w.maxRows()-w.maxRows()/8 && w.limit > 1 {
		w.limit -= max(1, w.limit/10)
		list = w.undominated(list)
	}
	list = list[:min(len(list), w.maxRows()-1)] // a formality: a limit of 1 needs about ln(n) rows
	slices.Reverse(list)
	slices.SortFunc(list, func(a, b candidate) int { return cmp.Compare(a.at, b.at) })
	w.keep(list)
	w.next = min(w.maxRows(), max(w.limit, w.stored)+w.slack(w.stored))
}

// outstays orders those that stay longest first: by time, or when nothing grows old by priority, the latest first.
func (w *Window) outstays(a, b candidate) int {
	if w.policy.Span != NoSpan && a.time != b.time {
		return cmp.Compare(b.time, a.time)
	}
	if w.policy.Span == NoSpan && a.priority != b.priority {
		return cmp.Compare(b.priority, a.priority)
	}
	return cmp.Compare(b.row, a.row)
}

// undominated keeps of list, in which no row outstays an earlier one, those with fewer than limit earlier ones of
// higher priority, or fewer than floor such in their class. With NoSpan it notes below what a row need not come in.
func (w *Window) undominated(list []candidate) []candidate {
	all := highest{k: w.limit}
	byClass := make([]highest, len(w.seen))
	for i := range byClass {
		byClass[i].k = w.floor()
	}
	kept := list[:0]
	for _, c := range list {
		inAll := all.offer(c)
		inClass := byClass[c.label].offer(c)
		if inAll || inClass {
			kept = append(kept, c)
		}
	}
	if w.policy.Span == NoSpan {
		w.bar = all.bar()
		w.classBar = w.classBar[:0]
		for i := range byClass {
			w.classBar = append(w.classBar, byClass[i].bar())
		}
	}
	return kept
}

// hopeless tells whether a new row of this class and key can never be in the sample, as far as the last thinning knows.
func (w *Window) hopeless(label int32, key uint64) bool {
	p := priority(w.policy.Seed, key)
	return p < w.bar && int(label) < len(w.classBar) && p < w.classBar[label]
}

// highest keeps the k highest candidates offered to it: a binary heap with the lowest of them on top.
type highest struct {
	k    int
	heap []candidate
}

// bar is what a candidate must reach to be taken: 0 when there is still room, more than any when k is 0.
func (h *highest) bar() uint64 {
	switch {
	case h.k == 0:
		return math.MaxUint64
	case len(h.heap) < h.k:
		return 0
	}
	return h.heap[0].priority
}

// offer takes c if it is among the k highest, and tells whether it was.
func (h *highest) offer(c candidate) bool {
	if len(h.heap) < h.k {
		h.heap = append(h.heap, c)
		for i := len(h.heap) - 1; i > 0 && h.heap[(i-1)/2].above(&h.heap[i]); i = (i - 1) / 2 {
			h.heap[i], h.heap[(i-1)/2] = h.heap[(i-1)/2], h.heap[i]
		}
		return true
	}
	if h.k == 0 || !c.above(&h.heap[0]) {
		return false
	}
	h.heap[0] = c
	for i := 0; ; {
		low := i
		for child := 2*i + 1; child <= 2*i+2 && child < len(h.heap); child++ {
			if h.heap[low].above(&h.heap[child]) {
				low = child
			}
		}
		if low == i {
			return true
		}
		h.heap[i], h.heap[low] = h.heap[low], h.heap[i]
		i = low
	}
}

// keep moves the listed rows, in order of arrival, to the front of the blocks and drops the rest.
func (w *Window) keep(list []candidate) {
	for i, c := range list {
		from, to := int(c.at), i
		if from != to {
			w.blocks[to/w.blockRows].move(to%w.blockRows, w.blocks[from/w.blockRows], from%w.blockRows)
		}
	}
	w.stored = len(list)
	used := (w.stored + w.blockRows - 1) / w.blockRows
	w.free = append(w.free, w.blocks[used:]...)
	clear(w.blocks[used:])
	w.blocks = w.blocks[:used]
	if used > 0 {
		w.blocks[used-1].stretch(w.stored - (used-1)*w.blockRows)
	}
}
