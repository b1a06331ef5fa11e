package model

import (
	"bytes"
	"context"
	"math"
	"testing"
)

var nan = math.NaN()

func fit(t testing.TB, o Options, table *Table) *Result {
	t.Helper()
	r, err := NewTrainer(o).Fit(context.Background(), table)
	if err != nil {
		t.Fatal(err)
	}
	return r
}

// quick are options for small tests.
func quick() Options {
	o := DefaultOptions()
	o.Folds = 3
	return o
}

func TestSavedSnapshotScoresTheSame(t *testing.T) {
	table, _ := recipe{rows: 400, numbers: 4, classes: 3, apart: 2, wrong: 0.1, category: true, missing: 0.05, sources: 2, seed: 3}.table()
	s := fit(t, quick(), table).Snapshot
	var b bytes.Buffer
	if n, err := s.WriteTo(&b); err != nil || n != int64(b.Len()) {
		t.Fatalf("%d bytes of %d, %v", n, b.Len(), err)
	}
	saved := bytes.Clone(b.Bytes())
	back, err := ReadSnapshot(&b)
	if err != nil {
		t.Fatal(err)
	}
	if back.ID() != s.ID() || len(s.ID()) != 12 {
		t.Errorf("id %q, was %q", back.ID(), s.ID())
	}
	var again bytes.Buffer
	back.WriteTo(&again)
	if !bytes.Equal(again.Bytes(), saved) {
		t.Error("saved anew, the bytes differ")
	}
	t.Logf("%d bytes", len(saved))
	fresh, _ := recipe{rows: 500, first: 400, numbers: 4, classes: 3, apart: 2, wrong: 0.1, category: true, missing: 0.05, sources: 2, seed: 3}.table()
	got, want := make([]Score, 500), make([]Score, 500)
	if err := s.NewScorer().Score(fresh, 0, 500, want); err != nil {
		t.Fatal(err)
	}
	if err := back.NewScorer().Score(fresh, 0, 500, got); err != nil {
		t.Fatal(err)
	}
	for i := range got {
		if got[i] != want[i] {
			t.Fatalf("row %d: %+v, before it was saved %+v", i, got[i], want[i])
		}
	}
}
