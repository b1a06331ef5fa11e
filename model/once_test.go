package model

import (
	"bytes"
	"context"
	"runtime"
	"testing"
)

// A fit that no other follows gives the same scores and the same snapshot, byte for byte, and a second one begins anew.
func TestOnceIsTheSame(t *testing.T) {
	table, _ := small.table()
	want := fit(t, quick(), table)
	o := quick()
	o.Once = true
	tr := NewTrainer(o)
	for range 2 {
		got, err := tr.Fit(context.Background(), table)
		if err != nil {
			t.Fatal(err)
		}
		if got.Snapshot.Facts().Warm {
			t.Error("a second fit is warm")
		}
		if !bytes.Equal(saved(t, got.Snapshot), saved(t, want.Snapshot)) {
			t.Error("another snapshot")
		}
		if !sameScores(got.Scores, want.Scores) {
			t.Error("other scores")
		}
	}
}

// What lives on when linear scorers are fitted is less than three quarters of what a fit holds that others may follow.
func TestOnceTakesLessMemory(t *testing.T) {
	table, _ := recipe{rows: 1600, numbers: 4, classes: 2, apart: 1, wrong: 0.1, seed: 6}.table()
	live := func(once bool) (most uint64) {
		o := quick()
		o.Once, o.Workers = once, 1
		phase := ""
		o.Progress = func(now string, done, _ int) {
			if now == phase || now == "trees" {
				return
			}
			phase = now
			runtime.GC()
			var m runtime.MemStats
			runtime.ReadMemStats(&m)
			most = max(most, m.HeapAlloc)
		}
		before := fitBase()
		fit(t, o, table)
		return most - before
	}
	if once, more := live(true), live(false); 4*once > 3*more {
		t.Errorf("%d kB live once, %d kB when more may follow", once>>10, more>>10)
	}
}

// fitBase is the memory in use before a fit.
func fitBase() uint64 {
	runtime.GC()
	var m runtime.MemStats
	runtime.ReadMemStats(&m)
	return m.HeapAlloc
}
