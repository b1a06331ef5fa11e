package filter

import "math"

const (
	budgetRows = 10_000 // records that the budget looks back on
	minHeld    = 10     // records of a class that may always be held back, the whole budget allowing
	closeShare = 0.8    // the budget is kept again when the wanted records are at most this share of it
)

// budget bounds what is held back of the last size records.
//
//   - All together: share·size records. Until size records have passed in an input of unknown length, share·n and three
//     standard deviations of a binomial count beyond, so that a run of wrong labels near the start is not taken for
//     too many; at least minHeld, at most share·size.
//   - Of one class, by observed label: half of that, and no more than half of the class's own records, as labels that
//     are wrong more often than right may be the ones that are right; but minHeld are always allowed.
//
// Beyond it the class, or everything, is held back no longer, until the records with the verdict quarantine have
// fallen to closeShare of the limit. Cost O(1) a record.
type budget struct {
	share float64
	size  int
	known bool // the input's length was known: no start to be lenient at

	ring        []passed
	at, n       int
	all         usage
	classes     []usage // by code
	rowsByClass []int
}

// passed is a record of the ring.
type passed struct {
	class        int32
	wanted, held bool
}

// usage counts records in the ring.
type usage struct {
	wanted, held int // with the verdict quarantine; held back
	open         bool
}

// decision is what the budget says of a record, and what changed with it.
type decision struct {
	hold               bool
	all, class         bool // whether that breaker changed
	wanted, limit, out int  // of the one that changed: wanted, allowed, records looked back on
}

// newBudget makes the budget for an input of total records, −1: not known.
func newBudget(share float64, total int64) *budget {
	b := &budget{share: share, size: budgetRows, known: total >= 0}
	if b.known {
		b.size = int(max(1, min(total, budgetRows)))
	}
	b.ring = make([]passed, b.size)
	return b
}

// limit is how many records may be held back now.
func (b *budget) limit() int {
	most := int(b.share * float64(b.size))
	if b.known || b.n == b.size {
		return most
	}
	n := float64(b.n)
	return min(most, max(minHeld, int(b.share*n+3*math.Sqrt(b.share*(1-b.share)*n))))
}

// classLimit is how many records of the class may be held back now.
func (b *budget) classLimit(class int32) int {
	return max(minHeld, min(b.limit(), b.rowsByClass[class])/2)
}

// decide takes in one record: its class (−1: no label) and whether its verdict is quarantine.
func (b *budget) decide(class int32, wanted bool) decision {
	b.slide(class, wanted)
	if class < 0 {
		return decision{}
	}
	d, c := decision{}, &b.classes[class]
	limit, classLimit := b.limit(), b.classLimit(class)
	over := wanted && b.all.held+1 > limit
	classOver := wanted && c.held+1 > classLimit
	if turn(&b.all, over, limit) {
		d.all, d.wanted, d.limit, d.out = true, b.all.wanted, limit, b.n
	} else if turn(c, classOver && !b.all.open, classLimit) {
		d.class, d.wanted, d.limit, d.out = true, c.wanted, classLimit, b.rowsByClass[class]
	}
	d.hold = wanted && !over && !classOver && !b.all.open && !c.open
	return d
}

// turn opens or closes a breaker and tells whether it did.
func turn(u *usage, over bool, limit int) bool {
	switch {
	case !u.open && over:
		u.open = true
	case u.open && !over && float64(u.wanted) <= closeShare*float64(limit):
		u.open = false
	default:
		return false
	}
	return true
}

// slide lets the oldest record of a full ring go and takes the new one in, not held.
func (b *budget) slide(class int32, wanted bool) {
	for int(class) >= len(b.classes) {
		b.classes, b.rowsByClass = append(b.classes, usage{}), append(b.rowsByClass, 0)
	}
	if b.n == b.size {
		b.count(b.ring[b.at], -1)
	} else {
		b.n++
	}
	b.ring[b.at] = passed{class: class, wanted: wanted}
	b.count(b.ring[b.at], 1)
	b.at = (b.at + 1) % b.size
}

// hold notes that the record taken in last is held back.
func (b *budget) hold() {
	p := &b.ring[(b.at+b.size-1)%b.size]
	p.held = true
	b.all.held++
	b.classes[p.class].held++
}

func (b *budget) count(p passed, by int) {
	if p.class < 0 {
		return
	}
	b.rowsByClass[p.class] += by
	for _, u := range []*usage{&b.all, &b.classes[p.class]} {
		if p.wanted {
			u.wanted += by
		}
		if p.held {
			u.held += by
		}
	}
}
