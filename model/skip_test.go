package model

import (
	"bytes"
	"errors"
	"reflect"
	"testing"
)

// A trainer that takes up another's work where that one searches anew goes on with the same bytes, cold and warm.
func TestSkipGoesOnAsTheOtherTrainerDid(t *testing.T) {
	line := func(rows int, first int64) *Table {
		table, _ := recipe{rows: rows, numbers: 2, classes: 2, apart: 4, wrong: 0.1, category: true, sources: 3, first: first, seed: 5}.table()
		return table
	}
	before, after := []*Table{line(60, 0), line(60, 20)}, []*Table{line(120, 40), line(120, 60), line(120, 80)}
	one, other := NewTrainer(quick()), NewTrainer(quick())
	run := func(tr *Trainer, table *Table) *Result {
		r, err := tr.Fit(t.Context(), table)
		if err != nil {
			t.Fatal(err)
		}
		return r
	}
	for _, table := range before {
		run(one, table)
	}
	other.Skip(uint64(len(before)))
	for i, table := range after {
		want, got := run(one, table), run(other, table)
		if want.Snapshot.Facts().Warm != (i > 0) {
			t.Fatalf("fit %d after the search: warm is %v", i, want.Snapshot.Facts().Warm)
		}
		if !bytes.Equal(saved(t, got.Snapshot), saved(t, want.Snapshot)) || !sameScores(got.Scores, want.Scores) {
			t.Errorf("fit %d after the search differs", i)
		}
	}
}

func TestFactsSurviveSaving(t *testing.T) {
	table, _ := recipe{rows: 80, numbers: 2, classes: 2, apart: 4, wrong: 0.1, sources: 3, seed: 5}.table()
	want := fit(t, quick(), table).Snapshot.Facts()
	b, err := want.AppendBinary([]byte("before"))
	if err != nil {
		t.Fatal(err)
	}
	b = b[len("before"):]
	var got Facts
	if err := got.UnmarshalBinary(b); err != nil || !reflect.DeepEqual(&got, want) {
		t.Errorf("got %+v, %v; want %+v", got, err, want)
	}
	for n := range b {
		if err := got.UnmarshalBinary(b[:n]); !errors.Is(err, ErrSnapshot) {
			t.Fatalf("cut to %d bytes of %d: got %v", n, len(b), err)
		}
	}
	if err := got.UnmarshalBinary(append(b, 0)); !errors.Is(err, ErrSnapshot) {
		t.Errorf("with a byte too many: got %v", err)
	}
}
