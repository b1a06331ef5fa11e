package model

import (
	"context"
	"math"
	"testing"

	"labelweir/model/internal/learn"
)

// The packed scorer of fresh rows says what the trained one says, up to the rounding of weights.
func TestPackedMembersScoreAsTrained(t *testing.T) {
	r := small
	r.rows = 250
	table, _ := r.table()
	tr := NewTrainer(quick())
	res, err := tr.Fit(context.Background(), table)
	if err != nil {
		t.Fatal(err)
	}
	f, m := tr.last, res.Snapshot.machine
	whole := f.folds[len(f.folds)-1]
	block := m.NewScratch()
	n := min(m.Rows(), len(f.rows))
	copy(block.X, f.data.X[:n*m.Dense])
	copy(block.Bins, f.data.Bins.Rows[:n*m.Bins])
	m.Score(block, n)
	var in learn.Input
	want := make([]float64, m.Classes)
	kinds := map[string]bool{}
	for i, p := range f.plan {
		for row := range n {
			if p.forest >= 0 {
				whole.Vote(p.forest, row, want)
			} else {
				l := f.linear[p.setting]
				whole.Input(f.data, row, &in)
				l.Score(&in, want)
			}
			for c, w := range want {
				if got := block.Members[i][row*m.Classes+c]; math.Abs(got-w) > 2e-3 {
					t.Fatalf("%v, row %d: %v of class %d, trained %v", p, row, got, c, w)
				}
			}
		}
		kinds[p.String()] = true
	}
	if len(kinds) < 2 {
		t.Errorf("members %v", kinds)
	}
}
