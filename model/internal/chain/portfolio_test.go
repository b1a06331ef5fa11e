package chain

import (
	"fmt"
	"math"
	"os"
	"strings"
	"testing"

	"labelweir/model/internal/loss"
)

// longRuns is how the best of many long annealing runs is found, half of them from zero weights and half from the
// graduated run; points that drop a whole class don't count, for anyone.
func longRuns(p *Problem, q float64, start *State, runs int, s *Scratch) float64 {
	best := math.Inf(1)
	opt := AnnealOptions{Bits: 6, Sweeps: 300, Cycles: 1, Hot: .05, Cold: 1e-4, Polish: true}
	for k := range runs {
		var from *State
		if k%2 == 0 {
			from = start
		}
		if st := Annealed(p, q, from, opt, newRand(uint64(100+k)), s); !st.Collapsed {
			best = min(best, st.J)
		}
	}
	return best
}

// tally counts, for one row of the table, how often each kind of run won.
type tally struct {
	instances, short    int
	beyond, beyondShort int // where dropping a class has a lower J than any solution that tells the classes apart
	won                 map[string]int
	worst               float64
}

func (c *tally) String() string {
	var b strings.Builder
	fmt.Fprintf(&b, "%3d instances, %d beyond 0.1 %%, worst %+.3f %%; won:", c.instances, c.short, 100*c.worst)
	for _, name := range []string{NameWarm, NameGraduated, NameDescent, NameAnnealed, NameShaken} {
		fmt.Fprintf(&b, " %s %d", name, c.won[name])
	}
	fmt.Fprintf(&b, "; q out of reach %d (%d beyond 0.1 %%)", c.beyond, c.beyondShort)
	return b.String()
}

// after returns a problem of n rows, the last share of which follows another rule than the first, and the index into
// the problem of the n rows before.
func after(n, d int, flip, share float64, other bool, seed uint64) (before, now *Problem, index []int32) {
	gone := int(share * float64(n))
	all, _ := linear(n+gone, d, 0, 0, flip, newRand(seed))
	if other {
		turned, _ := linear(n+gone, d, 0, 0, flip, newRand(seed+999))
		copy(all.X[n*all.Dense:], turned.X[n*all.Dense:])
		copy(all.Y[n:], turned.Y[n:])
	}
	before, _ = slide(all, 0, n, 0, 0)
	now, index = slide(all, gone, n+gone, 0, n)
	return before, now, index
}

// The whole table takes minutes: LABELWEIR_LONG=1 go test ./model/internal/chain -run Portfolio -v
func TestPortfolioAgainstLongRuns(t *testing.T) {
	ns, ds, flips, qs, runs := []int{300}, []int{10, 30}, []float64{.2}, []float64{-.5}, 10
	if os.Getenv("LABELWEIR_LONG") != "" {
		ns, ds, flips, qs, runs = []int{300, 1000, 4000}, []int{10, 30, 60}, []float64{.1, .2, .3, .4}, []float64{-1, -.5, 0}, 50
	}
	s := &Scratch{}
	tallies := map[string]*tally{}
	for _, setting := range []string{"cold", "warm, 5 % slid", "warm, half of another rule"} {
		tallies[setting] = &tally{won: map[string]int{}}
		for i, n := range ns {
			for _, d := range ds {
				for _, flip := range flips {
					for _, q := range qs {
						seed := uint64(1000*i + 10*d + int(100*flip))
						judge(t, tallies[setting], setting, n, d, flip, q, seed, runs, s)
					}
				}
			}
		}
		t.Logf("%-28s %v", setting, tallies[setting])
	}
}

func judge(t *testing.T, c *tally, setting string, n, d int, flip, q float64, seed uint64, long int, s *Scratch) {
	share, other := .05, false
	if strings.Contains(setting, "rule") {
		share, other = .5, true
	}
	before, p, index := after(n, d, flip, share, other, seed)
	var from *Start
	if setting != "cold" {
		old := Graduated(before, nil, []float64{q}, newRand(1), s)[0]
		from = Carry(&old, index, nil)
	}
	opt := DefaultPortfolio(n)
	opt.Hysteresis = 0
	runs, best := Portfolio(p, q, from, opt, newRand(seed), s)
	got := &runs[best].State
	grad := Graduated(p, nil, []float64{q}, newRand(1), s)[0]
	plain := Descend(p, q, newRand(1), s)
	truth := longRuns(p, q, &grad, long, s)
	for _, st := range []*State{&grad, &plain} { // of other seeds than the portfolio's own
		if !st.Collapsed {
			truth = min(truth, st.J)
		}
	}
	for _, r := range runs {
		if Less(&r.State, got) {
			t.Errorf("%s n=%d d=%d flip=%v q=%v: %s has J=%v, the portfolio %v", setting, n, d, flip, q, r.Name, r.State.J, got.J)
		}
	}
	gap := got.J/truth - 1
	if got.Collapsed || min(got.J, truth) > loss.CollapseCost(q, .5) {
		c.beyond++
		if gap > 1e-3 {
			c.beyondShort++
		}
		return
	}
	c.instances++
	c.won[runs[Winner(runs)].Name]++
	c.worst = max(c.worst, gap)
	if gap > 1e-3 {
		c.short++
		t.Errorf("%s n=%d d=%d flip=%v q=%v: J=%.6f (%s), best of %d long runs %.6f", setting, n, d, flip, q, got.J, runs[best].Name, long, truth)
	}
}
