package main

import (
	"context"
	"path/filepath"
	"testing"

	"labelweir/filter/cmd/labelweir/internal/judge/panel"
)

// The best of the methods in testdata/panel/baselines.tsv (scikit-learn's classifiers with trimming or a transition
// matrix), given as the mean over three seeds, must be reached on seed 0 up to the spread between seeds, which is up to
// 0.03 there.
func TestModelReachesTheBaselinesOnOpenData(t *testing.T) {
	const spread = 0.03
	base, err := panel.ReadBaselines(filepath.Join(committed, "baselines.tsv"))
	if err != nil {
		t.Fatal(err)
	}
	jobs, err := plan(settings{dir: committed, tables: []string{"wine", "wdbc"}, plans: []string{"uniform10", "uniform30", "pairwise"}, seeds: []int{0}})
	if err != nil {
		t.Fatal(err)
	}
	cells := grouped(runAll(context.Background(), jobs, 2, fitModel, t.Output()), base)
	if len(cells) != 6 {
		t.Fatalf("%d cells judged, want 2 tables of 3 plans", len(cells))
	}
	for _, g := range cells {
		if g.failed() > 0 {
			t.Errorf("%s", g.cells[0].line())
		} else if ap := g.mean("ap"); !(ap >= g.best.AP-spread) {
			t.Errorf("%s %s: average precision %.3f, %s reaches %.3f", g.table, g.plan, ap, g.best.Method, g.best.AP)
		}
	}
}

func mustCase(t *testing.T, j job) *panel.Case {
	t.Helper()
	c, err := j.table.Case(j.cell)
	if err != nil {
		t.Fatal(err)
	}
	return c
}
