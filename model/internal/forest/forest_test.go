package forest

import (
	"math"
	"math/rand/v2"
	"os"
	"reflect"
	"slices"
	"strconv"
	"strings"
	"testing"

	"pgregory.net/rapid"
)

// binned lays rows out as Bins.
func binned(rows [][]uint8) *Bins {
	b := &Bins{N: len(rows), D: len(rows[0])}
	b.Cols = make([][]uint8, b.D)
	for _, r := range rows {
		b.Rows = append(b.Rows, r...)
		for j, v := range r {
			b.Cols[j] = append(b.Cols[j], v)
		}
	}
	return b
}

func key(i int) uint64 { return uint64(i+1) * 0x9e3779b97f4a7c15 }

// allRows lists every row of b.
func allRows(b *Bins, labels []int32) Rows {
	r := Rows{Label: labels}
	for i := range b.N {
		r.At, r.Key = append(r.At, int32(i)), append(r.Key, key(i))
	}
	return r
}

// problem is a drawn table with options to grow on it.
type problem struct {
	b       *Bins
	rows    Rows
	classes int
	o       Options
	seed    uint64
}

func problems() *rapid.Generator[problem] {
	return rapid.Custom(func(t *rapid.T) problem {
		n, d := rapid.IntRange(2, 60).Draw(t, "rows"), rapid.IntRange(1, 6).Draw(t, "columns")
		p := problem{classes: rapid.IntRange(2, 4).Draw(t, "classes"), seed: rapid.Uint64().Draw(t, "seed")}
		rng := rand.New(rand.NewPCG(p.seed, 1))
		levels := rapid.SampledFrom([]int{1, 2, 5, 64, 256}).Draw(t, "levels")
		var rows [][]uint8
		var labels []int32
		for range n {
			r := make([]uint8, d)
			for j := range r {
				r[j] = uint8(rng.IntN(levels))
			}
			rows, labels = append(rows, r), append(labels, int32(rng.IntN(p.classes)))
		}
		p.b = binned(rows)
		p.rows = allRows(p.b, labels)
		p.o = Options{MaxDepth: rapid.IntRange(0, 12).Draw(t, "depth"), MinLeaf: rapid.IntRange(1, 5).Draw(t, "leaf"), Cuts: rapid.IntRange(1, 4).Draw(t, "cuts")}
		return p
	})
}

func (p problem) grow(n int) []*Tree {
	return Grow(p.b, p.rows, p.classes, n, p.o, rand.New(rand.NewPCG(p.seed, 2)))
}

// byDefinition follows the splits from node at and tells the leaf and its depth.
func byDefinition(t *Tree, at int32, bins []uint8, depth int) (int32, int) {
	n := t.Nodes[at]
	switch {
	case n.Child < 0:
		return ^n.Child, depth
	case bins[n.Feature] <= n.Cut:
		return byDefinition(t, n.Child, bins, depth+1)
	}
	return byDefinition(t, n.Child+1, bins, depth+1)
}

func TestTreesKeepTheirPromises(t *testing.T) {
	rapid.Check(t, func(t *rapid.T) {
		p := problems().Draw(t, "problem")
		trees := p.grow(3)
		f := New(p.classes, trees)
		walked := make([]int32, 3)
		counts := make([][]float64, f.Leaves())
		for i := range p.b.N {
			f.Walk(p.b.Row(i), walked)
			for k, tree := range trees {
				leaf, depth := byDefinition(tree, 0, p.b.Row(i), 0)
				if walked[k] != f.First[k]+leaf || walked[k] >= f.First[k+1] || tree.Leaf(p.b.Row(i)) != leaf {
					t.Fatalf("row %d, tree %d: walked to leaf %d, is in %d of %v", i, k, walked[k], leaf, f.First)
				}
				if depth > p.o.MaxDepth {
					t.Fatalf("row %d is %d deep in tree %d", i, depth, k)
				}
				if tree.InBag(p.rows.Key[i]) {
					if counts[walked[k]] == nil {
						counts[walked[k]] = make([]float64, p.classes)
					}
					counts[walked[k]][p.rows.Label[i]]++
				}
			}
		}
		p.wantShares(t, f, counts)
	})
}

// wantShares compares the leaves' shares with counts of the in-bag rows in them.
func (p problem) wantShares(t *rapid.T, f *Forest, counts [][]float64) {
	for k, tree := range f.Trees {
		for l := range int(f.First[k+1] - f.First[k]) {
			share, c := tree.Shares[l*p.classes:(l+1)*p.classes], counts[int(f.First[k])+l]
			n := 0.0
			for _, v := range c {
				n += v
			}
			if n < float64(p.o.MinLeaf) && len(tree.Nodes) > 1 {
				t.Fatalf("leaf %d of tree %d has %v rows in the bag, at least %d are wanted", l, k, n, p.o.MinLeaf)
			}
			for j, s := range share {
				want := 1 / float64(p.classes)
				if n > 0 {
					want = c[j] / n
				}
				if math.Abs(float64(s)-want) > 1e-6 {
					t.Fatalf("leaf %d of tree %d has share %v of class %d, counted %v", l, k, s, j, want)
				}
			}
		}
	}
}

func TestSameSeedSameTrees(t *testing.T) {
	rapid.Check(t, func(t *rapid.T) {
		p := problems().Draw(t, "problem")
		if a, b := p.grow(4), p.grow(4); !reflect.DeepEqual(a, b) {
			t.Fatal("two growths differ")
		}
	})
}

// Rows that differ in some column end in pure leaves, since every node with two classes can still be split.
func TestDeepTreesTellSeparableRowsApart(t *testing.T) {
	var rows [][]uint8
	var labels []int32
	for i := range 200 {
		rows = append(rows, []uint8{uint8(i * 37 % 251), uint8(i)})
		labels = append(labels, int32(i/100))
	}
	b := binned(rows)
	r := allRows(b, labels)
	right := 0
	for _, tree := range Grow(b, r, 2, 20, Options{MaxDepth: 200, MinLeaf: 1, Cuts: 1}, rand.New(rand.NewPCG(1, 1))) {
		for i := range rows {
			share := tree.Shares[2*tree.Leaf(rows[i])+int32(labels[i])]
			if tree.InBag(r.Key[i]) && share != 1 {
				t.Fatalf("row %d is in a leaf with a share %v of its class", i, share)
			}
			if share > 0.5 {
				right++
			}
		}
	}
	if right < 20*190 {
		t.Errorf("%d of 4000 right", right)
	}
}

func TestDrawnLabelsFollowTheirChances(t *testing.T) {
	const n = 300
	var rows [][]uint8
	var chance []float64
	labels := make([]int32, n)
	for i := range n {
		rows = append(rows, []uint8{uint8(i / 100)})
		chance = append(chance, []float64{0, 0.25, 1}[i/100], 0, 1-[]float64{0, 0.25, 1}[i/100])
	}
	b := binned(rows)
	r := allRows(b, labels)
	r.Chance = chance
	f := New(3, Grow(b, r, 3, 50, Options{MaxDepth: 3, MinLeaf: 1, Cuts: 1}, rand.New(rand.NewPCG(3, 1))))
	leaves, vote := make([]int32, 50), make([]float64, 3)
	for at, want := range []float64{0, 0.25, 1} {
		f.Walk(rows[100*at], leaves)
		f.Vote(leaves, vote)
		if math.Abs(vote[0]-want) > 0.03 || vote[1] != 0 || math.Abs(vote[0]+vote[2]-1) > 1e-6 {
			t.Errorf("vote %v of rows with a chance of %v", vote, want)
		}
	}
	if slices.Max(labels) != 0 {
		t.Error("the caller's labels were changed")
	}
}

// A bootstrap sample of n rows holds a share 1 − 1/e of them; two trees choose independently.
func TestBagHoldsItsShare(t *testing.T) {
	const n = 40000
	a, b := &Tree{Seed: 12345}, &Tree{Seed: 999}
	inA, inB, both := 0.0, 0.0, 0.0
	for i := range n {
		x, y := a.InBag(key(i)), b.InBag(key(i))
		if x {
			inA++
		}
		if y {
			inB++
		}
		if x && y {
			both++
		}
	}
	const share = 1 - 1/math.E
	for name, got := range map[string][2]float64{"first": {inA / n, share}, "second": {inB / n, share}, "both": {both / n, share * share}} {
		if math.Abs(got[0]-got[1]) > 0.008 {
			t.Errorf("%s: share %v, wanted %v", name, got[0], got[1])
		}
	}
}

func TestVoteIsTheMeanOfTheTrees(t *testing.T) {
	f := New(2, []*Tree{
		{Nodes: []Node{{Child: ^0}}, Shares: []float32{1, 0}},
		{Nodes: []Node{{Child: ^0}}, Shares: []float32{0.5, 0.5}},
		{Nodes: []Node{{Child: ^0}}, Shares: []float32{0, 1}},
		{Nodes: []Node{{Child: ^0}}, Shares: []float32{0.75, 0.25}},
	})
	vote := make([]float64, 2)
	if f.Vote([]int32{0, 1, 2, 3}, vote); !slices.Equal(vote, []float64{0.5625, 0.4375}) {
		t.Errorf("%v", vote)
	}
}

// More rows than a block has, of which only some vote; rows that every tree was grown on are among them.
func TestVoteOutOfBagIsTheMeanOfTheOtherTrees(t *testing.T) {
	const n = 3*blockRows + 7
	rng := rand.New(rand.NewPCG(2, 1))
	var trees []*Tree
	for range 4 {
		trees = append(trees, &Tree{Shares: []float32{1, 0, 0.25, 0.75, 0.5, 0.5}, Seed: rng.Uint64()})
	}
	f := New(2, trees)
	leaves := make([]int32, n*4)
	for i := range leaves {
		leaves[i] = f.First[i%4] + rng.Int32N(3)
	}
	var at []int32
	var keys []uint64
	for i := 0; i < n; i += 1 + i%2 {
		at, keys = append(at, int32(i)), append(keys, key(i))
	}
	got, never := make([]float64, 2*len(at)), 0
	f.VoteOutOfBag(leaves, at, keys, got)
	for i, r := range at {
		sum, count := 0.0, 0.0
		for j, tree := range trees {
			if !tree.InBag(keys[i]) {
				sum, count = sum+float64(tree.Shares[2*(leaves[int(r)*4+j]-f.First[j])]), count+1
			}
		}
		want := 0.5
		if count > 0 {
			want = sum / count
		} else {
			never++
		}
		if math.Abs(got[2*i]-want) > 1e-15 || math.Abs(got[2*i]+got[2*i+1]-1) > 1e-15 {
			t.Fatalf("row %d: %v, wanted %v", r, got[2*i:2*i+2], want)
		}
	}
	if never == 0 {
		t.Error("no row is in every bag")
	}
}

// scikit-learn 1.9.1, ExtraTreesClassifier(200, bootstrap=True, oob_score=True, class_weight="balanced") on load_wine,
// random_state 0 to 4: out-of-bag accuracy .972 to .989.
func TestOutOfBagAccuracyOnWineIsThatOfScikitLearn(t *testing.T) {
	b, labels := wine(t)
	r := allRows(b, labels)
	f := New(3, Grow(b, r, 3, 200, Options{MaxDepth: 30, MinLeaf: 1, Cuts: 1}, rand.New(rand.NewPCG(1, 1))))
	leaves, votes, right := make([]int32, 200*b.N), make([]float64, 3*b.N), 0.0
	for i := range b.N {
		f.Walk(b.Row(i), leaves[200*i:200*(i+1)])
	}
	f.VoteOutOfBag(leaves, r.At, r.Key, votes)
	for i := range b.N {
		vote := votes[3*i : 3*(i+1)]
		if slices.Index(vote, slices.Max(vote)) == int(labels[i]) {
			right++
		}
	}
	if right /= float64(b.N); right < 0.965 {
		t.Errorf("accuracy %.3f", right)
	}
}

// wine bins every number of the table by rank, 64 bins.
func wine(t *testing.T) (*Bins, []int32) {
	t.Helper()
	text, err := os.ReadFile("../../testdata/wine.tsv")
	if err != nil {
		t.Fatal(err)
	}
	lines := strings.Split(strings.TrimSpace(string(text)), "\n")[1:]
	values := make([][]float64, 13)
	var labels []int32
	for _, line := range lines {
		f := strings.Split(line, "\t")
		for j := range values {
			v, err := strconv.ParseFloat(f[j], 64)
			if err != nil {
				t.Fatal(err)
			}
			values[j] = append(values[j], v)
		}
		labels = append(labels, int32(f[13][len("class_")]-'0'))
	}
	rows := make([][]uint8, len(lines))
	for _, v := range values {
		sorted := slices.Clone(v)
		slices.Sort(sorted)
		for i, x := range v {
			at, _ := slices.BinarySearch(sorted, x)
			rows[i] = append(rows[i], uint8(at*64/len(v)))
		}
	}
	return binned(rows), labels
}
