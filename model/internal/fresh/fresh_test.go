package fresh

import (
	"math"
	"math/rand/v2"
	"slices"
	"strings"
	"testing"

	"pgregory.net/rapid"

	"labelweir/model/internal/forest"
	"labelweir/model/internal/kernel"
	"labelweir/model/internal/learn"
)

// grown draws a forest on random bins.
func grown(rng *rand.Rand, rows, bins, classes, trees int) (*forest.Forest, []uint8) {
	b := &forest.Bins{N: rows, D: bins, Cols: make([][]uint8, bins)}
	r := forest.Rows{}
	for i := range rows {
		for j := range bins {
			v := uint8(rng.IntN(64))
			b.Rows, b.Cols[j] = append(b.Rows, v), append(b.Cols[j], v)
		}
		r.At, r.Key, r.Label = append(r.At, int32(i)), append(r.Key, rng.Uint64()), append(r.Label, int32(rng.IntN(classes)))
	}
	return forest.New(classes, forest.Grow(b, r, classes, trees, forest.Options{MaxDepth: 30, MinLeaf: 1, Cuts: 1}, rng)), b.Rows
}

// The sums over a packed forest are those over the grown one, whose leaves are found by its own walk, up to half a step
// of the 16-bit scale a tree.
func TestPackedForestSumsTheSameLeaves(t *testing.T) {
	rapid.Check(t, func(t *rapid.T) {
		rng := rand.New(rand.NewPCG(rapid.Uint64().Draw(t, "seed"), 1))
		rows, bins := rapid.IntRange(1, 40).Draw(t, "rows"), rapid.IntRange(1, 5).Draw(t, "bins")
		columns := rapid.IntRange(1, 9).Draw(t, "columns")
		from, b := grown(rng, rows, bins, 3, 5)
		p, place := packForest(from, columns)
		values := make([][]float64, columns) // by leaf of the grown forest
		for c := range values {
			for range from.Leaves() {
				values[c] = append(values[c], rng.NormFloat64()*math.Pow(10, float64(rng.IntN(5)-2)))
			}
			p.set(c, func(l int) float64 { return values[c][place[l]] })
		}
		if err := p.check(bins); err != nil {
			t.Fatal(err)
		}
		got := make([]float64, rows*columns)
		p.sum(append(slices.Clone(b), make([]uint8, forest.Reach)...), bins, rows, make([]uint64, rows*2*p.words()), got)
		leaves := make([]int32, 5)
		for i := range rows {
			from.Walk(b[i*bins:(i+1)*bins], leaves)
			for c := range columns {
				want := 0.0
				for _, l := range leaves {
					want += values[c][l]
				}
				if math.Abs(got[i*columns+c]-want) > 5*0.51*p.Step[c]+1e-9 {
					t.Fatalf("row %d, column %d: %v, wanted %v, step %v", i, c, got[i*columns+c], want, p.Step[c])
				}
			}
		}
	})
}

// machine has a vote and linear scorers of every design over three classes.
func machine(t *testing.T) *Machine {
	t.Helper()
	rng := rand.New(rand.NewPCG(3, 1))
	const classes, dense, bins = 3, 5, 4
	raw, _ := grown(rng, 50, bins, classes, 7)
	cleaned, _ := grown(rng, 50, bins, classes, 7)
	x := make([]float32, 30*dense)
	for i := range x {
		x[i] = float32(rng.NormFloat64())
	}
	kern := kernel.New(x, 30, dense, dense-1, 8, 1, rng)
	members := []Source{{Vote: learn.Raw}, {Vote: learn.Cleaned}}
	for i, d := range learn.Designs {
		l := &learn.Linear{Setting: learn.Setting{Design: i}}
		n := dense
		if d.Kernel > 0 {
			n = kern.Size() + 1
		}
		if d.Leaf > 0 {
			n += cleaned.Leaves()
		}
		for _, ab := range [][2]int{{0, 1}, {0, 2}, {1, 2}} {
			w := make([]float64, n)
			for j := range w {
				w[j] = rng.NormFloat64()
			}
			l.Pairs = append(l.Pairs, learn.Pair{A: ab[0], B: ab[1], W: w})
		}
		members = append(members, Source{Linear: l})
	}
	m := Pack(classes, dense, bins, members, []*forest.Forest{raw, cleaned}, []*kernel.Map{kern})
	if err := m.Check(); err != nil {
		t.Fatal(err)
	}
	return m
}

func TestRowsOfABlockDoNotMix(t *testing.T) {
	m := machine(t)
	rng := rand.New(rand.NewPCG(4, 1))
	all, one := m.NewScratch(), m.NewScratch()
	const n = 11
	for i := range n * m.Dense {
		all.X[i] = float32(rng.NormFloat64())
	}
	for i := range n * m.Bins {
		all.Bins[i] = uint8(rng.IntN(64))
	}
	m.Score(all, n)
	for r := range n {
		copy(one.X, all.X[r*m.Dense:(r+1)*m.Dense])
		copy(one.Bins, all.Bins[r*m.Bins:(r+1)*m.Bins])
		m.Score(one, 1)
		for i := range m.Members {
			if got, want := one.Members[i][:3], all.Members[i][3*r:3*r+3]; !slices.Equal(got, want) {
				t.Fatalf("member %d, row %d: %v alone, %v among others", i, r, got, want)
			}
			if s := one.Members[i][0] + one.Members[i][1] + one.Members[i][2]; math.Abs(s) > 1e-6 {
				t.Errorf("member %d, row %d: scores sum to %v", i, r, s)
			}
		}
	}
	if n := testing.AllocsPerRun(10, func() { m.Score(all, n) }); n != 0 {
		t.Errorf("%v allocations", n)
	}
}

func TestForestsAndKernelsWithoutReadersAreLeftOut(t *testing.T) {
	rng := rand.New(rand.NewPCG(5, 1))
	raw, _ := grown(rng, 20, 2, 2, 3)
	cleaned, _ := grown(rng, 20, 2, 2, 3)
	m := Pack(2, 3, 2, []Source{{Vote: learn.Cleaned}}, []*forest.Forest{raw, cleaned}, []*kernel.Map{nil})
	if len(m.Forests) != 1 || len(m.Kernels) != 0 || m.Forests[0].Leaves() != cleaned.Leaves() {
		t.Errorf("%d forests and %d kernels", len(m.Forests), len(m.Kernels))
	}
}

func TestCheckRefusesWhatScoreCannotRun(t *testing.T) {
	for name, c := range map[string]struct {
		change func(*Machine)
		says   string
	}{
		"classes":        {func(m *Machine) { m.Classes = 1 }, "1 classes"},
		"no members":     {func(m *Machine) { m.Members = nil }, "no members"},
		"feature":        {func(m *Machine) { m.Forests[1].Nodes[0].Feature = 4 }, "forest 1: node 0 splits bin 4 of 4"},
		"cut tree":       {func(m *Machine) { f := &m.Forests[0]; f.Nodes = f.Nodes[:len(f.Nodes)-1] }, "lacks nodes"},
		"one more leaf":  {func(m *Machine) { f := &m.Forests[0]; f.Nodes = append(f.Nodes, Node{}) }, "words of values"},
		"values":         {func(m *Machine) { f := &m.Forests[0]; f.Values = f.Values[1:] }, "words of values"},
		"no trees":       {func(m *Machine) { f := &m.Forests[0]; f.Nodes, f.Values = nil, nil }, "0 trees"},
		"no columns":     {func(m *Machine) { f := &m.Forests[0]; f.Low, f.Step, f.Values = nil, nil, nil }, "0 columns"},
		"unused columns": {func(m *Machine) { m.Members = m.Members[1:] }, "forest 0"},
		"column":         {func(m *Machine) { m.Members[1].At = 1 }, "member 1: leaf values from 1 on, 0 are next"},
		"forest":         {func(m *Machine) { m.Members[0].Forest = 2 }, "member 0: forest 2 of 2"},
		"no forest":      {func(m *Machine) { m.Members[0].Forest = -1 }, "leaf values without a forest"},
		"kernel":         {func(m *Machine) { m.Members[5].Kernel = 1 }, "kernel 1 of 1"},
		"dim":            {func(m *Machine) { m.Kernels[0].Dim = 5 }, "rows of 5 of 4"},
		"no landmarks":   {func(m *Machine) { m.Kernels[0].Landmarks = nil }, "kernel 0"},
		"pair":           {func(m *Machine) { m.Members[3].Pairs[1].B = 3 }, "pair of classes 0 and 3 of 3"},
		"same pair":      {func(m *Machine) { m.Members[3].Pairs[1].B = 0 }, "pair of classes 0 and 0"},
		"no pairs":       {func(m *Machine) { m.Members[2].Pairs = nil }, "0 pairs"},
		"weights":        {func(m *Machine) { m.Members[2].Weight = m.Members[2].Weight[1:] }, "weights"},
		"smooth weights": {func(m *Machine) { m.Members[5].Smooth = nil }, "weights"},
		"clip":           {func(m *Machine) { m.Members[2].Clip = -1 }, "clipped at -1"},
	} {
		t.Run(name, func(t *testing.T) {
			m := machine(t)
			c.change(m)
			if err := m.Check(); err == nil || !strings.Contains(err.Error(), c.says) {
				t.Errorf("%v; wanted it to say %q", err, c.says)
			}
		})
	}
}

// A tree too large for indexes of 16 bits is walked row by row.
func TestLargeTreesAreWalkedToo(t *testing.T) {
	const rows, bins = 110000, 4
	rng := rand.New(rand.NewPCG(6, 1))
	from, b := grown(rng, rows, bins, 2, 1)
	p, place := packForest(from, 1)
	if p.trees[0].narrow {
		t.Fatalf("%d nodes are few", len(p.Nodes))
	}
	p.set(0, func(l int) float64 { return float64(place[l]) })
	got := make([]float64, rows)
	p.sum(append(b, make([]uint8, forest.Reach)...), bins, rows, make([]uint64, 2*rows), got)
	for i := 0; i < rows; i += 7 {
		if want := float64(from.Trees[0].Leaf(b[i*bins : (i+1)*bins])); math.Abs(got[i]-want) > p.Step[0] {
			t.Fatalf("row %d is in leaf %v, wanted %v", i, got[i], want)
		}
	}
}
