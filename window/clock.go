package window

import "time"

const (
	clockRing   = 64 // arrivals that are looked back on
	clockQuorum = 8  // of them that must have reached a time before it is believed
)

// unknown is a time that is not known. It is the value that marks a row without a time, too.
const unknown = int64(-1 << 63)

// clock tells how far record time has come: the latest time that clockQuorum of the last clockRing timed rows have
// reached. It never goes back, and a few rows from a wrong future do not move it.
type clock struct {
	now    int64 // nanoseconds since 1970; unknown before clockQuorum timed rows
	seen   int64 // timed rows
	recent [clockRing]int64
}

// see takes note of a row's time, and tells whether now has become known by it.
func (c *clock) see(t int64) bool {
	if t == unknown {
		return false
	}
	c.recent[c.seen%clockRing] = t
	c.seen++
	if c.now != unknown && t <= c.now {
		return false
	}
	var top [clockQuorum]int64 // the latest times beyond now, latest first
	n := 0
	for _, r := range c.recent[:min(c.seen, clockRing)] {
		if c.now != unknown && r <= c.now {
			continue
		}
		at := min(n, clockQuorum-1)
		if n == clockQuorum && r <= top[at] {
			continue
		}
		for ; at > 0 && top[at-1] < r; at-- {
			top[at] = top[at-1]
		}
		top[at] = r
		n = min(n+1, clockQuorum)
	}
	if n < clockQuorum {
		return false
	}
	first := c.now == unknown
	c.now = top[clockQuorum-1]
	return first
}

// old tells whether t has left the span before now.
func (c *clock) old(t int64, span time.Duration) bool {
	return span != NoSpan && c.now != unknown && t < c.now && uint64(c.now)-uint64(t) >= uint64(span)
}

// wild tells whether t lies further ahead of now than the span is long.
func (c *clock) wild(t int64, span time.Duration) bool {
	return span != NoSpan && c.now != unknown && t > c.now && uint64(t)-uint64(c.now) > uint64(span)
}
