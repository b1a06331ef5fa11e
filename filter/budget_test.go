package filter

import (
	"math/rand/v2"
	"strings"
	"testing"

	"pgregory.net/rapid"
)

// At every record, among the last size ones the records held back are within the budget, overall and by class: against
// a recount of the plain list.
func TestBudgetIsKeptAtEveryRecord(t *testing.T) {
	rapid.Check(t, func(t *rapid.T) {
		size := rapid.IntRange(20, 300).Draw(t, "size")
		share := rapid.Float64Range(0.01, 0.6).Draw(t, "share")
		b := newBudget(share, int64(size))
		rng := rand.New(rand.NewPCG(rapid.Uint64().Draw(t, "seed"), 1))
		wanted := rng.Float64()
		var past []passed
		for range rapid.IntRange(1, 1500).Draw(t, "records") {
			if rng.IntN(100) == 0 {
				wanted = rng.Float64() * rng.Float64()
			}
			p := passed{class: int32(rng.IntN(4)) - 1, wanted: rng.Float64() < wanted}
			p.wanted = p.wanted && p.class >= 0
			if p.held = b.decide(p.class, p.wanted).hold; p.held {
				b.hold()
			}
			past = append(past, p)
			all, own, rows := 0, 0, 0
			for _, q := range past[max(0, len(past)-size):] {
				if q.held {
					all++
				}
				if q.class == p.class {
					rows++
					if q.held {
						own++
					}
				}
			}
			if !p.held {
				continue
			}
			if most := int(share * float64(size)); all > most || !p.wanted {
				t.Fatalf("record %d: %d of %d held back, at most %d allowed", len(past)-1, all, size, most)
			} else if own > max(10, min(most, rows)/2) {
				t.Fatalf("record %d: %d of %d of its class held back, %d in all", len(past)-1, own, rows, most)
			}
		}
	})
}

// The limits as documented, by hand.
func TestBudgetLimits(t *testing.T) {
	for _, c := range []struct {
		name  string
		total int64
		n     int // records passed
		class int // of them of the class
		all   int
		own   int
	}{
		{"input of 1,000", 1000, 1, 1, 50, 10},
		{"half of a small class", 1000, 1000, 60, 50, 25},
		{"half of a rarer class", 1000, 1000, 30, 50, 15},
		{"ten of a class in any case", 1000, 1000, 12, 50, 10},
		{"an input of ten", 10, 10, 10, 0, 10},
		{"long input", 1_000_000, 10_000, 9000, 500, 250},
		{"unknown length, start", -1, 1, 1, 10, 10},
		{"unknown length, 1,000: 50 and 3·6.89", -1, 1000, 1000, 70, 35},
		{"unknown length, long past", -1, 20_000, 20_000, 500, 250},
	} {
		b := newBudget(0.05, c.total)
		for i := range c.n {
			class := int32(1)
			if i < c.n-c.class {
				class = 0
			}
			b.decide(class, false)
		}
		if all, own := b.limit(), b.classLimit(1); all != c.all || own != c.own {
			t.Errorf("%s: %d in all, %d of the class; want %d, %d", c.name, all, own, c.all, c.own)
		}
	}
}

func TestBudgetOpensAndClosesAgain(t *testing.T) {
	b := newBudget(0.1, 100) // ten in all
	var log []string
	pass := func(n int, class int32, wanted bool) {
		for range n {
			d := b.decide(class, wanted)
			if d.hold {
				b.hold()
			}
			if d.all {
				log = append(log, map[bool]string{true: "opened", false: "closed"}[b.all.open])
			}
		}
	}
	pass(50, 0, false)
	pass(10, 0, true)
	if len(log) != 0 || b.all.held != 10 {
		t.Fatalf("%v after ten", log)
	}
	pass(5, 1, true)
	if strings.Join(log, " ") != "opened" || b.all.held != 10 || b.all.wanted != 15 {
		t.Fatalf("%v after fifteen, %d held", log, b.all.held)
	}
	pass(91, 0, false) // now nine of them are left among the last hundred
	if strings.Join(log, " ") != "opened" {
		t.Fatalf("%v with %d of the last hundred wanted", log, b.all.wanted)
	}
	pass(1, 0, false)
	if strings.Join(log, " ") != "opened closed" {
		t.Fatalf("%v with %d of the last hundred wanted", log, b.all.wanted)
	}
	pass(1, 0, true)
	if b.all.held != 3 { // two of the first ten are still among the last hundred
		t.Errorf("%d of the last hundred are held back, want 3", b.all.held)
	}
}

// One class beyond its limit is let go, and the others are still held back.
func TestClassBudgetLeavesOtherClassesAlone(t *testing.T) {
	c := Default()
	c.Mode, c.Budget = Divert, 0.5
	b := newBreaker(c, 1000)
	held := [3]int{}
	for row := range int64(1000) {
		class, v := int32(row%3), Pass
		if class == 0 && row%5 > 0 || class == 1 && row%15 == 1 {
			v = Quarantine
		}
		if b.hold(row, class, v, grades()) {
			held[class]++
		}
	}
	e := b.report().Events
	if len(e) != 1 || e[0].Cause != "class-budget" || e[0].Class != "cull" || !e[0].Open || !b.report().Open {
		t.Fatalf("events %+v", e)
	}
	want := `the verdict is quarantine for 11 of the last 14 "cull" records; 10 may be held back`
	if e[0].Why != want {
		t.Errorf("it says %q, want %q", e[0].Why, want)
	}
	if held != [3]int{10, 67, 0} {
		t.Errorf("held back by class: %v", held)
	}
}

func TestObserveHoldsNothingBack(t *testing.T) {
	r := newRun(pack(3000, 0.2, 0, 1), nil).do(t)
	if r.report.Rows.Verdicts.Quarantine < 100 {
		t.Errorf("%+v: too few to tell", r.report.Rows)
	}
	if r.report.Rows.Quarantine != 0 || len(r.report.Breaker.Events) != 0 {
		t.Errorf("%+v, %+v", r.report.Rows, r.report.Breaker)
	}
}

// In an input as one window no more than the budget of it is held back, and the report tells when it was used up.
func TestBudgetBoundsAnInputAsOneWindow(t *testing.T) {
	r := newRun(pack(3000, 0.2, 0, 1), func(c *Config) { c.Mode = Divert }).do(t)
	if got := r.report.Rows.Quarantine; got < 100 || got > 150 {
		t.Errorf("%d of 3000 held back, at most 150 allowed", got)
	}
	e := r.report.Breaker.Events
	if len(e) == 0 || !e[0].Open || !r.report.Breaker.Open {
		t.Errorf("events %+v", r.report.Breaker)
	}
	for i, tag := range r.store.tags {
		if tag.Divert && tag.Verdict != Quarantine {
			t.Fatalf("row %d is held back with the verdict %v", i, tag.Verdict)
		}
	}
}
