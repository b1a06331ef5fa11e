package model

import (
	"context"
	"math"
	"testing"
)

var nan = math.NaN()

// quick are options for small tests.
func quick() Options {
	o := DefaultOptions()
	o.Folds = 2
	return o
}

func fit(t testing.TB, o Options, table *Table) *Result {
	t.Helper()
	r, err := NewTrainer(o).Fit(context.Background(), table)
	if err != nil {
		t.Fatal(err)
	}
	return r
}
