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
		from := Carry(&cold, index, nil)
		carried := objective(next, q, weights(next, from.Alpha))
		warm := Warm(next, q, from, 5, newRand(2), s)
		again := Graduated(next, nil, []float64{q}, newRand(3), s)[0]
		if got := objective(next, q, warm.W); math.Abs(got-warm.J) > 1e-9 {
			t.Errorf("q=%v: warm J=%v, from its weights %v", q, warm.J, got)
		}
		if warm.J > carried || warm.J > again.J*1.005 {
			t.Errorf("q=%v: J carried %v, warm %v, cold %v", q, carried, warm.J, again.J)
		}
		t.Logf("q=%v carried %.6f warm %.6f (%d epochs) cold %.6f (%d)", q, carried, warm.J, warm.Epochs, again.J, again.Epochs)
	}
}

func TestWarmFromAnOptimumStaysThere(t *testing.T) {
	p, _ := linear(500, 5, 0, 0, .2, newRand(4))
	s := &Scratch{}
	st := Graduated(p, nil, []float64{-.5}, newRand(1), s)[0]
	for range 30 {
		st = Warm(p, -.5, st.Start(), 40, newRand(2), s)
	}
	if again := Warm(p, -.5, st.Start(), 5, newRand(3), s); again.J > st.J+1e-12 || again.J < st.J-1e-6 {
		t.Errorf("J %v after the optimum's %v", again.J, st.J)
	}
}

func TestThreeEpochsDoForManyRows(t *testing.T) {
	all, _ := linear(8400, 10, 12, 16, .25, newRand(11))
	s := &Scratch{}
	p, _ := slide(all, 0, 8000, 0, 0)
	next, index := slide(all, 400, 8400, 0, 8000)
	for _, q := range []float64{-1, -.5, 0} {
		cold := Graduated(p, nil, []float64{q}, newRand(1), s)[0]
		three := Warm(next, q, Carry(&cold, index, nil), 3, newRand(2), s)
		many := Warm(next, q, Carry(&cold, index, nil), 40, newRand(2), s)
		if three.J > many.J*1.001 || three.Epochs != 3 {
			t.Errorf("q=%v: J %v after %d epochs, %v after %d", q, three.J, three.Epochs, many.J, many.Epochs)
		}
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
	start := Carry(&st, index, changed)
	if !start.New[pulling] || start.Alpha[pulling] != 0 {
		t.Errorf("a relabelled row has α %v and is new: %v", start.Alpha[pulling], start.New[pulling])
	}
}

// weights are Σ αᵢyᵢxᵢ, by definition.
func weights(p *Problem, alpha []float64) []float64 {
	w := make([]float64, p.Columns())
	for k, r := range p.Rows {
		t := alpha[k] * float64(p.Y[k])
		for c, v := range p.X[int(r)*p.Dense : int(r+1)*p.Dense] {
			w[c] += t * float64(v)
		}
		for _, c := range p.Leaves[int(r)*p.Trees : int(r+1)*p.Trees] {
			w[p.Dense+int(c)] += t * p.LeafValue
		}
	}
	return w
}

// A run that may hardly move keeps or drops a new row by its margin, and a known one as it came.
func TestNewRowsTakeTheFlagOfTheirMargin(t *testing.T) {
	all, _ := linear(1100, 10, 12, 16, .25, newRand(11))
	p, _ := slide(all, 0, 1000, 0, 0)
	s := &Scratch{}
	cold := Graduated(p, nil, []float64{-.5}, newRand(1), s)[0]
	next, index := slide(all, 100, 1100, 0, 1000)
	from := Carry(&cold, index, nil)
	w, kept, dropped := weights(next, from.Alpha), 0, 0
	s.view(next)
	s.take(-.5, from)
	for i, k := range s.perm {
		want := from.Keep[k]
		if index[k] < 0 {
			only := &Problem{Design: next.Design, Rows: next.Rows[k : k+1], Y: next.Y[k : k+1], Omega: []float64{1}, Lambda: 1e-300}
			if want = objective(only, math.Inf(-1), w) < 1.5*1.5; want {
				kept++
			} else {
				dropped++
			}
		}
		if s.keep[i] != want {
			t.Errorf("row %d: kept %v, wanted %v", k, s.keep[i], want)
		}
	}
	if kept == 0 || dropped == 0 {
		t.Errorf("%d new rows kept, %d dropped", kept, dropped)
	}
}

func TestStartsOfOtherProblemsAreRefused(t *testing.T) {
	p, _ := linear(50, 3, 0, 0, .1, newRand(4))
	defer func() {
		if recover() == nil {
			t.Error("a start of too few rows was taken")
		}
	}()
	Warm(p, -.5, &Start{Alpha: make([]float64, 49), Keep: make([]bool, 49)}, 5, newRand(1), &Scratch{})
}
