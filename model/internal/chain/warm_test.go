package chain

import (
	"math"
	"testing"
)

// slide returns the problem of rows lo to hi of all and the carry index from the one of rows lo0 to hi0.
func slide(all *Problem, lo, hi, lo0, hi0 int) (*Problem, []int32) {
	p := &Problem{Design: all.Design, Rows: all.Rows[lo:hi], Y: all.Y[lo:hi], Lambda: all.Lambda}
	p.Omega = balanced(p.Y)
	index := make([]int32, hi-lo)
	for k := range index {
		index[k] = -1
		if r := lo + k; r >= lo0 && r < hi0 {
			index[k] = int32(r - lo0)
		}
	}
	return p, index
}

func TestWarmNeverRaisesTheObjective(t *testing.T) {
	all, _ := linear(2100, 10, 12, 16, .25, newRand(11))
	s := &Scratch{}
	p, _ := slide(all, 0, 2000, 0, 0)
	for _, q := range []float64{-1, -.5, 0} {
		cold := Graduated(p, nil, []float64{q}, newRand(1), s)[0]
		next, index := slide(all, 100, 2100, 0, 2000)
		from := Carry(next, q, &cold, index, nil, s)
		if got := objective(next, q, from.W); math.Abs(got-from.J) > 1e-9 {
			t.Errorf("q=%v: carried J=%v, from its weights %v", q, from.J, got)
		}
		warm := Warm(next, q, &from, 5, newRand(2), s)
		again := Graduated(next, nil, []float64{q}, newRand(3), s)[0]
		if got := objective(next, q, warm.W); math.Abs(got-warm.J) > 1e-9 {
			t.Errorf("q=%v: warm J=%v, from its weights %v", q, warm.J, got)
		}
		if warm.J > from.J || warm.J > again.J*1.005 {
			t.Errorf("q=%v: J carried %v, warm %v, cold %v", q, from.J, warm.J, again.J)
		}
		t.Logf("q=%v carried %.6f warm %.6f (%d epochs) cold %.6f (%d)", q, from.J, warm.J, warm.Epochs, again.J, again.Epochs)
	}
}

func TestWarmFromAnOptimumStaysThere(t *testing.T) {
	p, _ := linear(500, 5, 0, 0, .2, newRand(4))
	s := &Scratch{}
	st := Graduated(p, nil, []float64{-.5}, newRand(1), s)[0]
	for range 30 {
		st = Warm(p, -.5, &st, 40, newRand(2), s)
	}
	if again := Warm(p, -.5, &st, 5, newRand(3), s); again.J > st.J+1e-12 || again.J < st.J-1e-6 {
		t.Errorf("J %v after the optimum's %v", again.J, st.J)
	}
}

func TestCarryTreatsARelabelledRowAsNew(t *testing.T) {
	p, _ := linear(300, 5, 0, 0, .1, newRand(4))
	s := &Scratch{}
	st := Graduated(p, nil, []float64{-.5}, newRand(1), s)[0]
	index := make([]int32, 300)
	changed := make([]bool, 300)
	var pulling int
	for k := range index {
		index[k] = int32(k)
		if st.Alpha[k] > 0 {
			pulling = k
		}
	}
	changed[pulling] = true
	if got := Carry(p, -.5, &st, index, changed, s).Alpha[pulling]; got != 0 {
		t.Errorf("α of a relabelled row is %v, want 0", got)
	}
}
