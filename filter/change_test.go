package filter

import (
	"math"
	"math/rand/v2"
	"testing"

	"labelweir/model"
)

// scored makes n scores of which k disagree.
func scored(n, k int) []model.Score {
	list := make([]model.Score, n)
	for i := range list {
		list[i].Margin = 1
		if i < k {
			list[i].Margin = -1
		}
	}
	return list
}

// flow lets n records come in that disagree with chance p, and gives the rows of the alarms; each is closed at once.
func flow(c *change, rng *rand.Rand, from, n int, p float64) []int {
	var alarms []int
	for i := range n {
		s := model.Score{Margin: 1}
		if rng.Float64() < p {
			s.Margin = -1
		}
		if c.arrive(int64(from+i), &s) {
			alarms = append(alarms, from+i)
			c.open, c.g = false, 0
		}
	}
	return alarms
}

// While nothing changes, the mean number of records between alarms is at least exp(level) = a million (Lorden 1971,
// Procedures for reacting to a change in distribution, theorem 2): in twelve million at most 24, by Poisson's
// distribution at 1 in 1,000. The bound is loose, and at half of what is tolerated there are none at all.
func TestFalseAlarmsAreRare(t *testing.T) {
	if math.Abs(changeLevel-math.Log(1e6)) > 1e-12 {
		t.Errorf("level %v, want ln 1,000,000", changeLevel)
	}
	for _, p := range []float64{0.01, 0.1, 0.4} {
		c := change{}
		c.fitted(disagreement(scored(20_000, int(20_000*p))))
		rng := rand.New(rand.NewPCG(1, 2))
		if got := flow(&c, rng, 0, 4_000_000, c.normal+tolerated); len(got) > 24 {
			t.Errorf("share %v: %d alarms", p, len(got))
		}
		if got := flow(&c, rng, 0, 1_000_000, p+tolerated/2); len(got) > 0 {
			t.Errorf("share %v: %d alarms at half of what is tolerated", p, len(got))
		}
	}
}

// A share that has risen by farMore is noticed after about level/KL records, KL being the Kullback–Leibler divergence
// of it and the tolerated one (Lorden 1971, theorem 3).
func TestDelayIsWhatTheorySays(t *testing.T) {
	const runs = 300
	c := change{}
	c.fitted(disagreement(scored(20_000, 2_000)))
	p0, p1 := c.normal+tolerated, c.normal+farMore
	kl := p1*math.Log(p1/p0) + (1-p1)*math.Log((1-p1)/(1-p0))
	want := changeLevel / kl
	sum := 0.0
	for seed := range uint64(runs) {
		c.g = 0
		rng := rand.New(rand.NewPCG(seed, 3))
		got := flow(&c, rng, 0, 5000, p1)
		if len(got) == 0 {
			t.Fatal("no alarm")
		}
		sum += float64(got[0] + 1)
	}
	if got := sum / runs; math.Abs(got-want) > 0.15*want {
		t.Errorf("noticed after %.1f records, theory says about %.1f", got, want)
	}
}

func TestOnsetIsNearTheChange(t *testing.T) {
	far := 0
	for seed := range uint64(200) {
		c := change{}
		c.fitted(disagreement(scored(20_000, 1000)))
		rng := rand.New(rand.NewPCG(seed, 5))
		flow(&c, rng, 0, 1000, 0.05)
		for row := int64(1000); !c.open; row++ {
			s := model.Score{Margin: 1}
			if rng.Float64() < 0.6 {
				s.Margin = -1
			}
			c.arrive(row, &s)
		}
		if c.onset < 970 || c.onset > 1010 {
			far++
		}
	}
	if far > 10 {
		t.Errorf("the onset is more than 30 rows early or 10 late in %d of 200 runs", far)
	}
}

func TestChangeClosesAfterCooldown(t *testing.T) {
	open := func() *change {
		c := &change{cooldown: 3}
		c.fitted(disagreement(scored(1000, 50))) // up to 6.5 % is normal
		flow(c, rand.New(rand.NewPCG(1, 1)), 0, 100, 0)
		for row := int64(100); !c.open; row++ {
			c.arrive(row, &model.Score{Margin: -1})
		}
		return c
	}
	// slice lets a slice pass, a retrain follow with the window's share of disagreement, and tells whether it closed.
	slice := func(c *change, disagree, oldest, window int) bool {
		c.next()
		for i := range 100 {
			s := model.Score{Margin: 1}
			if i < disagree {
				s.Margin = -1
			}
			c.arrive(int64(1000+i), &s)
		}
		closed := c.slice(int64(oldest))
		c.next()
		c.fitted(disagreement(scored(1000, window)))
		return closed
	}
	t.Run("three normal slices in a row", func(t *testing.T) {
		c := open()
		for i, want := range []bool{false, false, true} {
			if got := slice(c, 5, 0, 50); got != want {
				t.Errorf("slice %d: closed %v", i, got)
			}
			if c.doubts(1000) {
				t.Errorf("slice %d: rows are doubted after a normal slice", i)
			}
		}
	})
	t.Run("one that is not begins it again", func(t *testing.T) {
		c := open()
		for i, disagree := range []int{5, 5, 40, 5, 5} {
			if slice(c, disagree, 0, 50) {
				t.Errorf("closed at slice %d", i)
			}
			if got, want := c.doubts(1000), disagree == 40; got != want {
				t.Errorf("slice %d: rows are doubted: %v", i, got)
			}
		}
		if !slice(c, 5, 0, 50) {
			t.Error("still open")
		}
	})
	t.Run("the window's own disagreement is no excuse while it holds older rows", func(t *testing.T) {
		c := open()
		for range 10 {
			if slice(c, 30, 0, 300) {
				t.Error("closed at 30 % where 6 % was normal")
			}
		}
	})
	t.Run("but a noisier state is accepted once the window is from after the change", func(t *testing.T) {
		c := open()
		slice(c, 30, int(c.onset), 300)
		for i, want := range []bool{false, false, true} {
			if got := slice(c, 30, int(c.onset), 300); got != want {
				t.Errorf("slice %d: closed %v", i, got)
			}
		}
	})
	t.Run("too few records say nothing", func(t *testing.T) {
		c := open()
		c.next()
		if c.slice(0) || c.calm != 0 {
			t.Error("an empty slice counts as normal")
		}
	})
	t.Run("rows before the change are not doubted", func(t *testing.T) {
		c := open()
		if c.doubts(99) || !c.doubts(100) {
			t.Errorf("onset %d", c.onset)
		}
	})
}

func TestUnscoredRecordsDoNotMoveTheTest(t *testing.T) {
	c := change{}
	c.fitted(disagreement(scored(1000, 50)))
	for row := range int64(10_000) {
		if c.arrive(row, &model.Score{P: math.NaN(), Margin: math.NaN(), Reason: model.NewClass}) ||
			c.arrive(row, &model.Score{Margin: math.NaN()}) {
			t.Fatal("alarm")
		}
	}
	if c.seen != 0 {
		t.Errorf("%d counted", c.seen)
	}
}

// Grades that take on another meaning halfway: the breaker opens soon after, no record is held back on the word of
// snapshots that know only the old meaning, rows are unscored until the readings are normal, and then it closes.
func TestGradesWithAnotherMeaning(t *testing.T) {
	const turn = 4000
	for _, hold := range []int{0, 200} {
		r := newRun(pack(9000, 0.05, turn, 6), func(c *Config) {
			c.Sliding, c.Records, c.Mode, c.Hold, c.Budget = true, 1000, Divert, hold, 0.5
		})
		r.do(t)
		e := r.report.Breaker.Events
		if len(e) < 2 || e[0].Cause != "change" || !e[0].Open || e[0].Row < turn || e[0].Row > turn+120 {
			t.Fatalf("hold %d: %+v", hold, e)
		}
		if last := e[len(e)-1]; r.report.Breaker.Open || last.Open {
			t.Errorf("hold %d: still open at the end: %+v", hold, e)
		}
		before, after, unscored := 0, 0, 0
		for i, tag := range r.store.tags {
			switch {
			case tag.Divert && i < turn:
				before++
			case tag.Divert && int64(i) < e[len(e)-1].Row:
				after++
			case tag.Reason == model.InputsChanged:
				unscored++
				if i < turn-20 {
					t.Fatalf("hold %d: row %d is unscored before the change", hold, i)
				}
			}
		}
		// Without a hold those that pass before the alarm can't be called back. With one only those can be that the
		// onset comes late by, as some records agree with the model by chance.
		if most := map[int]int{0: 100, 200: 15}[hold]; after > most {
			t.Errorf("hold %d: %d records held back between the change and the end of the breaker, at most %d expected", hold, after, most)
		}
		if before < 100 || unscored < 100 || int64(unscored) != r.report.Rows.Reasons.InputsChanged {
			t.Errorf("hold %d: %d held back before, %d unscored after, %d in the report", hold, before, unscored, r.report.Rows.Reasons.InputsChanged)
		}
	}
}

// More wrong labels alone are no change: that is what is to be found.
func TestMoreWrongLabelsAreNoChange(t *testing.T) {
	apples := append(pack(4000, 0.05, 0, 1), pack(4000, 0.13, 0, 2)...)
	r := newRun(apples, func(c *Config) { c.Sliding, c.Records = true, 1000 }).do(t)
	if len(r.report.Breaker.Events) != 0 || r.report.Rows.Reasons.InputsChanged != 0 {
		t.Errorf("%+v", r.report.Breaker)
	}
}
