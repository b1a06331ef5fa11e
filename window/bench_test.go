package window

import (
	"testing"
	"time"

	"labelweir/model"
)

// wide makes rows of 30 numbers.
func wide(n int) *model.Table {
	t := numbers(0, n, 100)
	for len(t.Columns) < 30 {
		t.Columns = append(t.Columns, model.Column{Name: "more", Kind: model.Number, Size: 1, Values: make([]float64, n)})
	}
	return t
}

// BenchmarkAppend appends batches of 4,096 rows of 30 numbers to a full window of 20,000.
func BenchmarkAppend(b *testing.B) {
	for _, c := range []struct {
		name string
		p    Policy
	}{
		{"latest", Policy{Records: 20_000, Bytes: 512 << 20, Keep: Latest, Seed: 1}},
		{"everything", Policy{Records: 20_000, Bytes: 512 << 20, Keep: Uniform, Floor: 25, Seed: 1}},
		{"span of ten windows", Policy{Records: 20_000, Span: 200_000, Bytes: 512 << 20, Keep: Uniform, Floor: 25, Seed: 1}},
	} {
		b.Run(c.name, func(b *testing.B) {
			w := must(b, c.p)
			table, times := wide(4096), make([]int64, 4096)
			row := int64(0)
			batch := func() {
				for i := range times {
					times[i] = row + int64(i)
					table.Keys[i] = model.Key(row + int64(i))
				}
				if err := w.Append(table, row, times, 0, 4096); err != nil {
					b.Fatal(err)
				}
				row += 4096
			}
			for row < 400_000 {
				batch()
			}
			b.ReportAllocs()
			b.ResetTimer()
			for b.Loop() {
				batch()
			}
			b.ReportMetric(4096*float64(b.N)/b.Elapsed().Seconds(), "rows/s")
		})
	}
}

// BenchmarkView copies a window of 20,000 rows of 30 numbers.
func BenchmarkView(b *testing.B) {
	w := must(b, Policy{Records: 20_000, Span: time.Hour, Bytes: 512 << 20, Keep: Uniform, Floor: 25, Seed: 1})
	table := wide(60_000)
	if err := w.Append(table, 0, make([]int64, 60_000), 0, 60_000); err != nil {
		b.Fatal(err)
	}
	for b.Loop() {
		w.View()
	}
}
