package chain

import (
	"math"
	"math/rand/v2"
	"syscall"
	"testing"
	"time"
)

// cpu is the processor time the process has used: on a machine with other work to do, wall time says little.
func cpu() time.Duration {
	var u syscall.Rusage
	if syscall.Getrusage(syscall.RUSAGE_SELF, &u) != nil {
		return 0
	}
	return time.Duration(u.Utime.Nano() + u.Stime.Nano())
}

// measureCPU starts a measurement; what it returns reports it.
func measureCPU(b *testing.B) func() {
	start := cpu()
	return func() { b.ReportMetric((cpu()-start).Seconds()*1e3/float64(b.N), "cpu-ms/op") }
}

// encoded draws a problem of the shape the encoder makes: 30 numbers of which some matter, a constant, and 100 trees of
// about 150 leaves each, grown as axis-parallel random splits so that their leaves say something of the class.
func encoded(n int, flip float64, rng *rand.Rand) *Problem {
	const d, trees, depth = 30, 100, 8
	ds := &Design{N: n, Dense: d + 1, Trees: trees, LeafValue: .7 / math.Sqrt(trees)}
	p := &Problem{Design: ds, Lambda: 3e-3}
	x := make([]float64, n*d)
	for i := range x {
		x[i] = rng.NormFloat64()
	}
	for i := range n {
		row := x[i*d : (i+1)*d]
		for _, v := range row {
			ds.X = append(ds.X, float32(.7*v/math.Sqrt(d)))
		}
		ds.X = append(ds.X, 1)
		z := row[0] + row[1]*row[2] + math.Abs(row[3]) - .8 + .5*row[4] + .4*rng.NormFloat64()
		y := int8(1)
		if (z < 0) != (rng.Float64() < flip) {
			y = -1
		}
		p.Rows, p.Y = append(p.Rows, int32(i)), append(p.Y, y)
	}
	p.Omega = balanced(p.Y)
	ds.Leaves = make([]int32, n*trees)
	for t := range trees {
		all := make([]int32, n)
		for i := range all {
			all[i] = int32(i)
		}
		growRandom(ds, x, d, t, all, depth, rng)
	}
	return p
}

// growRandom splits rows at random values of random columns and numbers the leaves of tree t.
func growRandom(ds *Design, x []float64, d, t int, rows []int32, depth int, rng *rand.Rand) {
	if depth > 0 && len(rows) >= 10 {
		c, at := rng.IntN(8), float64(0)
		at = x[int(rows[rng.IntN(len(rows))])*d+c]
		var left, right []int32
		for _, r := range rows {
			if x[int(r)*d+c] < at {
				left = append(left, r)
			} else {
				right = append(right, r)
			}
		}
		if len(left) >= 5 && len(right) >= 5 {
			growRandom(ds, x, d, t, left, depth-1, rng)
			growRandom(ds, x, d, t, right, depth-1, rng)
			return
		}
	}
	for _, r := range rows {
		ds.Leaves[int(r)*ds.Trees+t] = int32(ds.LeafCols)
	}
	ds.LeafCols++
}

const benchRows = 16_000

// All of a cold path with snapshots at the three usual values of q.
func BenchmarkGraduated(b *testing.B) {
	p := encoded(benchRows, .1, newRand(1))
	s := &Scratch{}
	b.ReportAllocs()
	defer measureCPU(b)()
	for b.Loop() {
		states := Graduated(p, nil, []float64{-1, -.5, 0}, newRand(2), s)
		b.ReportMetric(float64(states[2].Epochs), "epochs")
	}
	b.ReportMetric(float64(p.LeafCols), "leaves")
}

// A slide by 5 % with five epochs, carrying included.
func BenchmarkWarm(b *testing.B) {
	all := encoded(benchRows*105/100, .1, newRand(1))
	s := &Scratch{}
	before, _ := slide(all, 0, benchRows, 0, 0)
	old := Graduated(before, nil, []float64{-.5}, newRand(2), s)[0]
	p, index := slide(all, benchRows*5/100, benchRows*105/100, 0, benchRows)
	cold := Graduated(p, nil, []float64{-.5}, newRand(2), s)[0]
	b.ReportAllocs()
	defer measureCPU(b)()
	var warm State
	for b.Loop() {
		warm = Warm(p, -.5, Carry(&old, index, nil), 5, newRand(2), s)
	}
	b.ReportMetric(warm.J/cold.J, "J/cold")
}

func BenchmarkAnnealed(b *testing.B) {
	p := encoded(benchRows, .1, newRand(1))
	s := &Scratch{}
	g := Graduated(p, nil, []float64{-.5}, newRand(2), s)[0]
	var st State
	defer measureCPU(b)()
	for b.Loop() {
		st = Annealed(p, -.5, &g, DefaultAnneal(), newRand(3), s)
	}
	b.ReportMetric(st.J/g.J, "J/start")
}

func BenchmarkShakenHop(b *testing.B) {
	p := encoded(benchRows, .1, newRand(1))
	s := &Scratch{}
	g := Graduated(p, nil, []float64{-.5}, newRand(2), s)[0]
	var st State
	defer measureCPU(b)()
	for b.Loop() {
		st = Shaken(p, -.5, &g, 1, newRand(3), s)
	}
	b.ReportMetric(st.J/g.J, "J/start")
}
