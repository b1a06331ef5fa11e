package chain

import (
	"fmt"
	"testing"
	"time"
)

func TestZZ(t *testing.T) {
	s := &Scratch{}
	for _, c := range []struct {
		n, d int
		f    float64
	}{{300, 10, .1}, {300, 10, .4}, {300, 60, .2}, {300, 60, .4}, {1000, 30, .3}, {1000, 60, .4}, {4000, 60, .1}, {4000, 30, .4}} {
		p, _ := linear(c.n, c.d, 0, 0, c.f, newRand(1))
		for _, q := range []float64{-1, -.5, 0} {
			t0 := time.Now()
			g := Graduated(p, nil, []float64{q}, newRand(3), s)[0]
			tg := time.Since(t0)
			t0 = time.Now()
			d := Descend(p, q, newRand(3), s)
			td := time.Since(t0)
			o := DefaultAnneal()
			t0 = time.Now()
			a := Annealed(p, q, &g, o, newRand(4), s)
			ta := time.Since(t0)
			z := Annealed(p, q, nil, o, newRand(4), s)
			best := 1e9
			var js []float64
			t0 = time.Now()
			for k := range 50 {
				o := o
				o.Sweeps = 300
				o.Cycles = 1
				o.Bits = 6
				x := Annealed(p, q, nil, o, newRand(uint64(100+k)), s)
				js = append(js, x.J)
				best = min(best, x.J)
			}
			fmt.Printf("n=%d d=%d f=%.1f q=%v grad %.5f(%v) desc %.5f(%v) ann|g %.5f(%v) ann0 %.5f best50 %.5f(%v)\n", c.n, c.d, c.f, q, g.J, tg.Round(time.Millisecond), d.J, td.Round(time.Millisecond), a.J, ta.Round(time.Millisecond), z.J, best, time.Since(t0).Round(time.Millisecond))
		}
	}
}
