package window

import (
	"fmt"
	"math"
	"testing"
	"time"

	"gonum.org/v1/gonum/stat/distuv"

	"labelweir/model"
)

// numbers makes a table of n rows with one number each; every rare-th row is of class "cull", 0: none is.
func numbers(first int64, n, rare int) *model.Table {
	t := &model.Table{Columns: []model.Column{{Name: "x", Kind: model.Number, Size: 1, Values: make([]float64, n)}},
		Labels: make([]int32, n), Keys: make([]uint64, n), Classes: []string{"first", "cull"}}
	for i := range n {
		t.Columns[0].Values[i] = float64(first) + float64(i)
		t.Keys[i] = model.Key(first + int64(i))
		if rare > 0 && (int(first)+i)%rare == 0 {
			t.Labels[i] = 1
		}
	}
	return t
}

// must gives a window, or stops the test.
func must(t testing.TB, p Policy) *Window {
	t.Helper()
	w, err := New(p)
	if err != nil {
		t.Fatal(err)
	}
	return w
}

// add appends n rows, row i of them at i·step.
func add(t testing.TB, w *Window, first int64, n, rare int, step time.Duration) {
	t.Helper()
	times := make([]int64, n)
	for i := range times {
		times[i] = (first + int64(i)) * int64(step)
	}
	if err := w.Append(numbers(first, n, rare), first, times, 0, n); err != nil {
		t.Fatal(err)
	}
}

// Every row of the span has the same chance to be in the sample, whatever its age: over many seeds the counts by age
// fit a uniform distribution (Pearson's chi-square against gonum's distribution, at 1 in 10,000).
func TestSampleIsUniformOverTheSpan(t *testing.T) {
	const records, span, rows, parts, seeds = 50, 1000, 3000, 20, 400
	for _, limit := range []int64{1 << 20, 60 * 200} { // the second is too few bytes for the rows that may come in yet
		count := make([]float64, parts)
		total := 0.0
		for seed := range uint64(seeds) {
			w := must(t, Policy{Records: records, Span: span * time.Second, Bytes: limit, Keep: Uniform, Seed: seed})
			add(t, w, 0, rows, 0, time.Second)
			v := w.View()
			if got := w.Stats().Limit; len(v.Rows) != got {
				t.Fatalf("seed %d: %d rows, limit %d", seed, len(v.Rows), got)
			}
			now := int64(rows - clockQuorum) // what eight rows have reached
			for _, r := range v.Rows {
				if r <= now-span {
					t.Fatalf("row %d is older than the span, which began after %d", r, now-span)
				}
				count[min(parts-1, (r-(now-span+1))*parts/span)]++
				total++
			}
		}
		chi := 0.0
		for k, c := range count {
			ages := float64(span / parts)
			if k == parts-1 { // the rows beyond now, too
				ages += clockQuorum - 1
			}
			e := total * ages / (span + clockQuorum - 1)
			chi += (c - e) * (c - e) / e
		}
		// Rows are drawn without replacement, which can only make the counts more even than the distribution has them.
		if top := (distuv.ChiSquared{K: parts - 1}).Quantile(0.9999); chi > top {
			t.Errorf("%d bytes: chi-square %.1f over %d parts, at most %.1f expected: %v", limit, chi, parts, top, count)
		}
	}
}

// The stored rows are as many as theory says: the expected number is k(1 + H_n − H_k), the number of k-records among n
// (Babcock, Datar & Motwani 2002, §3, there as O(k log n)).
func TestStoredRowsGrowWithTheLogarithmOfTheSpan(t *testing.T) {
	const k, n, seeds = 100, 20_000, 20
	want := float64(k)
	for i := k + 1; i <= n; i++ {
		want += float64(k) / float64(i)
	}
	sum := 0.0
	for seed := range uint64(seeds) {
		w := must(t, Policy{Records: k, Span: n * time.Second, Bytes: 1 << 30, Keep: Uniform, Seed: seed})
		add(t, w, 0, 3*n, 0, time.Second)
		w.thin()
		sum += float64(w.Stats().Stored)
	}
	if got := sum / seeds; math.Abs(got-want) > 0.05*want {
		t.Errorf("%.0f rows stored on average, theory says %.0f", got, want)
	}
}

func TestViewTellsHowManyRowsItStandsFor(t *testing.T) {
	const n = 20_000
	w := must(t, Policy{Records: 400, Span: n * time.Second, Bytes: 1 << 30, Keep: Uniform, Floor: 5, Seed: 9})
	add(t, w, 0, 300, 50, time.Second)
	if got := w.View().Stands; got != 300 {
		t.Errorf("stands for %d rows with all 300 there", got)
	}
	add(t, w, 300, 3*n, 50, time.Second)
	if got := float64(w.View().Stands); math.Abs(got-n) > 4*n/math.Sqrt(400) { // four standard errors
		t.Errorf("stands for about %.0f rows, want %d", got, n)
	}
	all := must(t, Policy{Records: 400, Bytes: 1 << 30, Keep: Uniform, Seed: 9})
	add(t, all, 0, n, 0, time.Second)
	if got := all.View().Stands; got != n {
		t.Errorf("stands for %d of everything, want %d", got, n)
	}
}

func TestRareClassKeepsItsFloor(t *testing.T) {
	for _, c := range []struct{ floor, want int }{{0, -1}, {25, 25}, {400, 50}} { // 400 would be more than half
		t.Run(fmt.Sprint(c.floor), func(t *testing.T) {
			w := must(t, Policy{Records: 200, Bytes: 1 << 20, Keep: Uniform, Floor: c.floor, Seed: 5})
			add(t, w, 0, 40_000, 400, 0) // 100 culls, half a row of which would be in the sample
			v, culls := w.View(), 0
			for _, l := range v.Table.Labels {
				culls += int(l)
			}
			if len(v.Rows) != 200 {
				t.Fatalf("%d rows, want 200", len(v.Rows))
			}
			if c.want >= 0 && culls != c.want || c.want < 0 && culls > 5 {
				t.Errorf("%d rows of the rare class, want %d", culls, c.want)
			}
		})
	}
}

func TestSampleDependsOnTheSeed(t *testing.T) {
	same := 0
	a := must(t, Policy{Records: 100, Bytes: 1 << 20, Keep: Uniform, Seed: 1})
	b := must(t, Policy{Records: 100, Bytes: 1 << 20, Keep: Uniform, Seed: 2})
	add(t, a, 0, 10_000, 0, 0)
	add(t, b, 0, 10_000, 0, 0)
	for _, r := range a.View().Rows {
		if b.View().Index(r) >= 0 {
			same++
		}
	}
	if same > 10 { // 1 expected
		t.Errorf("%d of 100 rows are the same under two seeds", same)
	}
}
