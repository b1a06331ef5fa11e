package forest

import (
	"math/rand/v2"
	"slices"
	"testing"

	"pgregory.net/rapid"
)

func TestWalkerFindsTheSameLeaves(t *testing.T) {
	rapid.Check(t, func(t *rapid.T) {
		p := problems().Draw(t, "problem")
		var rows []int32
		for i := range p.b.N {
			if rapid.Bool().Draw(t, "walked") {
				rows = append(rows, int32(i))
			}
		}
		w := NewWalker(p.b, rows)
		for _, tree := range p.grow(2) {
			dst, want := make([]int32, 3*p.b.N), make([]int32, 3*p.b.N)
			w.Leaves(tree, 100, dst, 3)
			for _, i := range rows {
				want[3*i] = 100 + tree.Leaf(p.b.Row(int(i)))
			}
			if !slices.Equal(dst, want) {
				t.Fatalf("rows %v: %v, wanted %v", rows, dst, want)
			}
		}
	})
}

func TestLargeTreesAreWalkedRowByRow(t *testing.T) {
	const n = 110000
	rng := rand.New(rand.NewPCG(1, 1))
	b := &Bins{N: n, D: 4, Cols: make([][]uint8, 4)}
	r := Rows{}
	for i := range n {
		for j := range 4 {
			v := uint8(rng.IntN(64))
			b.Rows, b.Cols[j] = append(b.Rows, v), append(b.Cols[j], v)
		}
		r.At, r.Key, r.Label = append(r.At, int32(i)), append(r.Key, rng.Uint64()), append(r.Label, int32(rng.IntN(2)))
	}
	tree := Grow(b, r, 2, 1, Options{MaxDepth: 60, MinLeaf: 1, Cuts: 1}, rng)[0]
	if len(tree.Nodes) <= Reach {
		t.Fatalf("%d nodes are few", len(tree.Nodes))
	}
	dst := make([]int32, n)
	NewWalker(b, r.At).Leaves(tree, 0, dst, 1)
	for i := 0; i < n; i += 11 {
		if want := tree.Leaf(b.Row(i)); dst[i] != want {
			t.Fatalf("row %d: leaf %d, wanted %d", i, dst[i], want)
		}
	}
}
