package model

import (
	"context"
	"math/rand/v2"
	"testing"
)

// crate makes a table of the apples numbered from lo to hi: two grades that differ in diameter.
func crate(lo, hi int) *Table {
	t := &Table{Columns: []Column{{Name: "diameter_mm", Kind: Number, Size: 1}}, Classes: []string{"cull", "first"}}
	for i := lo; i < hi; i++ {
		rng := rand.New(rand.NewPCG(uint64(i), 7))
		grade := int32(rng.IntN(2))
		t.Columns[0].Values = append(t.Columns[0].Values, 60+20*float64(grade)+3*rng.NormFloat64())
		t.Labels, t.Keys = append(t.Labels, grade), append(t.Keys, Key(int64(i)))
	}
	return t
}

// Settings are searched anew when the window has grown to twice the rows of the last search, or fallen below half.
func TestSearchFollowsTheSizeOfTheWindow(t *testing.T) {
	tr := NewTrainer(DefaultOptions())
	for _, x := range []struct {
		lo, hi int
		warm   bool
	}{{0, 60, false}, {0, 119, true}, {0, 120, false}, {40, 160, true}, {100, 160, true}, {101, 160, false}} {
		r, err := tr.Fit(context.Background(), crate(x.lo, x.hi))
		if err != nil {
			t.Fatal(err)
		}
		if got := r.Snapshot.Facts().Warm; got != x.warm {
			t.Errorf("rows %d to %d: warm %v, want %v", x.lo, x.hi, got, x.warm)
		}
	}
}
