package chain

import (
	"math"
	"slices"
	"testing"
)

func TestGraduatedReportsTheObjectiveOfItsWeights(t *testing.T) {
	for _, trees := range []int{0, 10} {
		p, _ := linear(600, 8, trees, 12, .2, newRand(1))
		want := []float64{math.Inf(-1), -1, -.5, 0}
		for _, st := range Graduated(p, nil, want, newRand(2), &Scratch{}) {
			j := objective(p, st.Q, st.W)
			if math.Abs(j-st.J) > 1e-9 || !(st.J < 1) {
				t.Errorf("trees=%d q=%v: J=%v, from its weights %v", trees, st.Q, st.J, j)
			}
			t.Logf("trees=%d q=%v J=%.5f %v %d epochs", trees, st.Q, st.J, st.Status, st.Epochs)
		}
	}
}

func TestGraduatedIsTheSameForTheSameSeed(t *testing.T) {
	p, _ := linear(400, 6, 5, 9, .2, newRand(1))
	s := &Scratch{}
	a := Graduated(p, nil, []float64{-.5}, newRand(3), s)[0]
	big, _ := linear(900, 11, 3, 9, .2, newRand(7))
	Graduated(big, nil, []float64{0}, newRand(3), s) // dirties the scratch
	b := Graduated(p, nil, []float64{-.5}, newRand(3), s)[0]
	if !slices.Equal(a.W, b.W) || a.J != b.J {
		t.Error("same seed and used scratch gave other weights")
	}
}

func TestGraduatedDropsTheFlippedRows(t *testing.T) {
	p, flipped := linear(2000, 10, 0, 0, .2, newRand(5))
	st := Graduated(p, nil, []float64{0}, newRand(6), &Scratch{})[0]
	var hit, dropped, all int
	for i, f := range flipped {
		if f {
			all++
		}
		if !st.Keep[i] {
			dropped++
			if f {
				hit++
			}
		}
	}
	if float64(hit) < .8*float64(all) || float64(hit) < .5*float64(dropped) {
		t.Errorf("dropped %d rows, %d of them among the %d flipped", dropped, hit, all)
	}
}
