package chain

import (
	"math"
	"testing"
)

func TestBestKeepsTheRunningStateWithinTheHysteresis(t *testing.T) {
	states := []State{{J: .5}, {J: .4999}, {J: .6}}
	cases := []struct {
		running    int
		hysteresis float64
		want       int
	}{{-1, .01, 1}, {0, .01, 0}, {0, 1e-5, 1}, {2, .01, 1}, {2, .2, 2}, {1, 0, 1}}
	for _, c := range cases {
		if got := Best(states, c.running, c.hysteresis); got != c.want {
			t.Errorf("running %d, hysteresis %v: %d, want %d", c.running, c.hysteresis, got, c.want)
		}
	}
}

func TestBestAvoidsACollapsedState(t *testing.T) {
	states := []State{{J: .5, Collapsed: true}, {J: .6}}
	for running := -1; running < 2; running++ {
		if got := Best(states, running, .9); got != 1 {
			t.Errorf("running %d: chose the collapsed state", running)
		}
	}
}

func TestWinnerIsTheFirstOfThoseAsDeep(t *testing.T) {
	runs := []Run{{NameGraduated, State{J: .50001}}, {NameDescent, State{J: .52}}, {NameShaken, State{J: .5}}}
	if got := Winner(runs); got != 0 {
		t.Errorf("winner %s, want the graduated run: it is as deep to a ten-thousandth", runs[got].Name)
	}
	runs[0].State.J = .502
	if got := Winner(runs); got != 2 {
		t.Errorf("winner %s, want the shaken run", runs[got].Name)
	}
}

// On labels that say nothing, dropping a class is at q = 0 the lowest J there is; no run may end there.
func TestRunsKeepAwayFromDroppingAClass(t *testing.T) {
	const q = 0
	p, _ := linear(600, 10, 0, 0, .4, newRand(3))
	constant := make([]float64, p.Columns())
	constant[p.Dense-1] = 1
	lowest := objective(p, q, constant)
	runs, use := Portfolio(p, q, nil, DefaultPortfolio(600), newRand(1), &Scratch{})
	if st := &runs[use].State; st.Collapsed || st.J <= lowest {
		t.Errorf("%s ended at J=%v, collapsed %v; dropping a class costs %v", runs[use].Name, st.J, st.Collapsed, lowest)
	}
}

func TestRowsWithoutWeightDoNoHarm(t *testing.T) {
	p, _ := linear(300, 5, 0, 0, .1, newRand(3))
	without := *p
	without.Rows, without.Y, without.Omega = p.Rows[:200], p.Y[:200], balanced(p.Y[:200])
	p.Omega = append(balanced(p.Y[:200]), make([]float64, 100)...)
	a, b := solve(&without, 1e-9), solve(p, 1e-9)
	if math.Abs(a.J-b.J) > 1e-9 {
		t.Errorf("J=%v with rows of weight zero, %v without them", b.J, a.J)
	}
}

// The inner loops must not allocate: they run for every fold, pair and epoch.
func TestEpochsAllocateNothing(t *testing.T) {
	p, _ := linear(500, 10, 8, 10, .2, newRand(1))
	s, rng := &Scratch{}, newRand(2)
	s.load(p, rng)
	s.remember(s.measure(-.5))
	st := Stage{Q: -.5, Rounds: 3, Tolerance: 0}
	if got := testing.AllocsPerRun(5, func() { s.descendOut(st, rng) }); got > 0 {
		t.Errorf("%v allocations a stage", got)
	}
	l := &s.lattice
	l.build(s, -.5, 10, 5)
	l.place(s.w)
	opt := DefaultAnneal()
	if got := testing.AllocsPerRun(2, func() { l.cool(opt, 1, rng) }); got > 0 {
		t.Errorf("%v allocations a cooling", got)
	}
}
