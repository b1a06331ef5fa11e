package model

import (
	"context"
	"testing"
)

// line is the table of the benchmarks: a full window of a packing line, two grades unless said otherwise.
var line = recipe{rows: 20000, numbers: 30, classes: 2, apart: 0.5, wrong: 0.1, seed: 1}

func single() Options {
	o := DefaultOptions()
	o.Workers = 1
	return o
}

func BenchmarkCold(b *testing.B) { benchmarkCold(b, line) }

func BenchmarkSixClasses(b *testing.B) {
	r := line
	r.classes = 6
	benchmarkCold(b, r)
}

func benchmarkCold(b *testing.B, r recipe) {
	table, _ := r.table()
	for b.Loop() {
		fit(b, single(), table)
	}
	b.ReportMetric(float64(r.rows)*float64(b.N)/b.Elapsed().Seconds(), "rows/s")
}

// BenchmarkWarm fits a window that slides by 5 %.
func BenchmarkWarm(b *testing.B) {
	r := line
	tr := NewTrainer(single())
	slide := func() *Table {
		t, _ := r.table()
		r.first += int64(r.rows / 20)
		return t
	}
	if _, err := tr.Fit(context.Background(), slide()); err != nil {
		b.Fatal(err)
	}
	for b.Loop() {
		b.StopTimer()
		t := slide()
		b.StartTimer()
		if _, err := tr.Fit(context.Background(), t); err != nil {
			b.Fatal(err)
		}
	}
}

// BenchmarkFreshRow judges rows a thousand at a time, as a stream does, and one at a time.
func BenchmarkFreshRow(b *testing.B) {
	table, _ := line.table()
	s := fit(b, DefaultOptions(), table).Snapshot
	b.Logf("%+v", s.Facts().Choice.Members)
	r := line
	r.first, r.rows = int64(r.rows), 4096
	fresh, _ := r.table()
	for _, c := range []struct {
		name string
		rows int
	}{{"rows=1024", 1024}, {"rows=1", 1}} {
		b.Run(c.name, func(b *testing.B) {
			sc, dst := s.NewScorer(), make([]Score, c.rows)
			b.ReportAllocs()
			at := 0
			for b.Loop() {
				if err := sc.Score(fresh, at, at+c.rows, dst); err != nil {
					b.Fatal(err)
				}
				at = (at + c.rows) % (r.rows - c.rows + 1) / c.rows * c.rows
			}
			b.ReportMetric(float64(b.Elapsed().Nanoseconds())/float64(b.N*c.rows), "ns/row")
		})
	}
}
