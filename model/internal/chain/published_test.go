package chain

import (
	"fmt"
	"math"
	"math/rand/v2"
	"testing"
)

// longServedio draws the data of Long & Servedio, "Random classification noise defeats all convex potential boosters",
// Machine Learning 78 (2010), in the 21-feature form: a quarter of the rows have every feature equal to the label, a
// quarter ("pullers") the first 11 equal and the last 10 opposed, half ("penalisers") 5 random ones of the first 11 and
// 6 random ones of the last 10 equal and the rest opposed.
func longServedio(rng *rand.Rand) (x []float64, y int8) {
	const d = 21
	y = int8(2*rng.IntN(2) - 1)
	x = make([]float64, d)
	for k := range x {
		x[k] = -float64(y)
	}
	switch rng.IntN(4) {
	case 0:
		for k := range x {
			x[k] = float64(y)
		}
	case 1:
		for k := range 11 {
			x[k] = float64(y)
		}
	default:
		for _, k := range rng.Perm(11)[:5] {
			x[k] = float64(y)
		}
		for _, k := range rng.Perm(10)[:6] {
			x[11+k] = float64(y)
		}
	}
	return x, y
}

// measeWyner draws the data of Mease & Wyner, "Evidence contrary to the statistical view of boosting", Journal of
// Machine Learning Research 9 (2008): 20 uniform features, the label is whether the first 5 add up to more than 5/2.
func measeWyner(rng *rand.Rand) (x []float64, y int8) {
	x = make([]float64, 20)
	var sum float64
	for k := range x {
		x[k] = rng.Float64()
		if k < 5 {
			sum += x[k]
		}
		x[k] = math.Sqrt(12) * (x[k] - .5) // unit variance
	}
	if sum > 2.5 {
		return x, 1
	}
	return x, -1
}

// published draws n rows and flips a share of the rows of class +1.
func published(draw func(*rand.Rand) ([]float64, int8), n int, flip, lambda float64, rng *rand.Rand) (p *Problem, flipped []bool) {
	ds := &Design{N: n}
	p = &Problem{Design: ds, Lambda: lambda}
	flipped = make([]bool, n)
	for i := range n {
		x, y := draw(rng)
		ds.Dense = len(x) + 1
		for _, v := range x {
			ds.X = append(ds.X, float32(v/math.Sqrt(float64(len(x)))))
		}
		ds.X = append(ds.X, 1)
		if y > 0 && rng.Float64() < flip {
			y, flipped[i] = -1, true
		}
		p.Rows, p.Y = append(p.Rows, int32(i)), append(p.Y, y)
	}
	p.Omega = balanced(p.Y)
	return p, flipped
}

// On both data sets the bounded loss ranks the planted flips first, at 10 to 40 % of one class flipped, where convex
// losses do not. Equal row weights are how those are used; with the classes balanced, which on Mease & Wyner's data is
// most of the cure, they come to 0.90–0.94 there, still behind.
func TestBoundedLossFindsPlantedFlips(t *testing.T) {
	cases := []struct {
		name         string
		draw         func(*rand.Rand) ([]float64, int8)
		rows         int
		recovered    float64
		balancedLead float64
	}{
		{"Long & Servedio 2010", longServedio, 2000, .999, .3},
		{"Mease & Wyner 2008", measeWyner, 8000, .95, .04},
	}
	const q, lambda = -.5, 1e-3
	for _, c := range cases {
		for _, flip := range []float64{.1, .2, .3, .4} {
			t.Run(fmt.Sprintf("%s, %.0f %%", c.name, 100*flip), func(t *testing.T) {
				p, flipped := published(c.draw, c.rows, flip, lambda, newRand(5))
				st := Graduated(p, nil, []float64{q}, newRand(1), &Scratch{})[0]
				m := margins(p, st.W)
				got, found := averagePrecision(m, flipped), recovered(m, flipped)
				rival := func(phi func(float64) (float64, float64)) float64 {
					return averagePrecision(margins(p, convex(t, p, phi)), flipped)
				}
				balancedLog, balancedHinge := rival(logistic), rival(squaredHinge)
				for i := range p.Omega {
					p.Omega[i] = 1 / float64(c.rows)
				}
				log, hinge := rival(logistic), rival(squaredHinge)
				t.Logf("average precision: bounded %.4f (recovered %.3f), logistic %.3f, squared hinge %.3f, balanced %.3f, %.3f",
					got, found, log, hinge, balancedLog, balancedHinge)
				if got < .99 || found < c.recovered {
					t.Errorf("bounded loss: average precision %.4f, recovered %.3f", got, found)
				}
				if log >= .9 || hinge >= .9 {
					t.Errorf("convex losses reach %.3f and %.3f: these data no longer defeat them", log, hinge)
				}
				if lead := got - max(balancedLog, balancedHinge); lead < c.balancedLead {
					t.Errorf("lead over balanced convex losses %.3f", lead)
				}
			})
		}
	}
}

// Without a flip hardly a row is dropped.
func TestBoundedLossLeavesCleanDataAlone(t *testing.T) {
	for name, draw := range map[string]func(*rand.Rand) ([]float64, int8){"Long & Servedio": longServedio, "Mease & Wyner": measeWyner} {
		p, _ := published(draw, 4000, 0, 1e-3, newRand(5))
		st := Graduated(p, nil, []float64{-.5}, newRand(1), &Scratch{})[0]
		var dropped int
		for _, keep := range st.Keep {
			if !keep {
				dropped++
			}
		}
		if dropped > 20 {
			t.Errorf("%s: %d of 4,000 clean rows dropped", name, dropped)
		}
	}
}
