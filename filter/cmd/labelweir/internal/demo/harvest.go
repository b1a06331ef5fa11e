package demo

import (
	"math/rand/v2"
	"time"
)

// Harvest is what went over the belt, apple by apple, with what was planted in it.
type Harvest struct {
	apples  []apple
	graders []int       // index into graders
	called  []int       // index into grades: the grade written down
	at      []time.Time // when
}

// interval is the time between two apples.
const interval = 1500 * time.Millisecond

// Grow gives rows apples. The same rows and seed give the same harvest.
func Grow(rows int, seed uint64) *Harvest {
	rng := rand.New(rand.NewPCG(seed, 0xa991e))
	h := &Harvest{
		apples: make([]apple, rows), graders: make([]int, rows), called: make([]int, rows), at: make([]time.Time, rows),
	}
	at := time.Date(2026, time.September, 14, 6, 0, 0, 0, time.UTC)
	for i := range h.apples {
		h.apples[i] = pick(rng)
		h.graders[i] = rng.IntN(len(graders))
		h.called[i] = graders[h.graders[i]].call(h.apples[i].grade, h.secondHalf(i), rng)
		h.at[i] = at
		at = at.Add(interval)
	}
	return h
}

// Rows is the number of apples.
func (h *Harvest) Rows() int { return len(h.apples) }

// wrong tells whether the grade written down for apple i is not its own.
func (h *Harvest) wrong(i int) bool { return h.called[i] != h.apples[i].grade }

func (h *Harvest) secondHalf(i int) bool { return i >= len(h.apples)/2 }
