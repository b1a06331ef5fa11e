package model

import (
	"os"
	"runtime"
	"testing"
	"time"
)

// Wide tables of an invented packing line end within their stated memory, and what was planted is found. Heap is the most in
// use while fitting, garbage that is not collected yet included.
func TestWideAndOdd(t *testing.T) {
	for name, c := range map[string]struct {
		recipe recipe
		vector bool // all numbers in one column
		long   bool
		heap   uint64  // MB
		found  float64 // average precision at least
	}{
		"300 numbers":                  {recipe: recipe{rows: 300, numbers: 300, classes: 2, apart: 0.6}, heap: 60, found: 0.9},
		"a vector of 300":              {recipe: recipe{rows: 300, numbers: 300, classes: 2, apart: 0.6}, vector: true, heap: 60, found: 0.9},
		"30 classes":                   {recipe: recipe{rows: 600, numbers: 6, classes: 30, apart: 5}, heap: 130, found: 0.9},
		"2,000 numbers":                {recipe: recipe{rows: 5000, numbers: 2000, classes: 4, apart: 0.24}, long: true, heap: 1200, found: 0.9},
		"a vector of 768, 5,000 rows":  {recipe: recipe{rows: 5000, numbers: 768, classes: 4, apart: 0.3}, vector: true, long: true, heap: 450, found: 0.9},
		"a vector of 768, 20,000 rows": {recipe: recipe{rows: 20000, numbers: 768, classes: 4, apart: 0.3}, vector: true, long: true, heap: 1500, found: 0.9},
		"26 classes":                   {recipe: recipe{rows: 20000, numbers: 16, classes: 26, apart: 3.2}, long: true, heap: 450, found: 0.8},
		"100 classes":                  {recipe: recipe{rows: 20000, numbers: 16, classes: 100, apart: 3.2}, long: true, heap: 1000, found: 0.8},
	} {
		t.Run(name, func(t *testing.T) {
			if c.long && os.Getenv("LABELWEIR_LONG") == "" {
				t.Skip("LABELWEIR_LONG=1 runs it")
			}
			c.recipe.wrong, c.recipe.seed = 0.08, 11
			table, truth := c.recipe.table()
			if c.vector {
				table.Columns = []Column{joined(table)}
			}
			o := DefaultOptions()
			o.Once = true
			if !c.long {
				o.Folds = 2
			}
			var r *Result
			heap := peakHeap(func() { r = fit(t, o, table) })
			if heap > c.heap<<20 {
				t.Errorf("%d MB, wanted at most %d", heap>>20, c.heap)
			}
			if ap := averagePrecision(r.Scores, table.Labels, truth); ap < c.found {
				t.Errorf("average precision %.3f, wanted at least %.2f", ap, c.found)
			} else {
				t.Logf("%d MB, average precision %.3f", heap>>20, ap)
			}
		})
	}
}

// joined makes one vector of the numbers of t.
func joined(t *Table) Column {
	c := Column{Name: "probe", Kind: Vector, Size: len(t.Columns)}
	for i := range t.Rows() {
		for k := range t.Columns {
			c.Values = append(c.Values, t.Columns[k].Values[i])
		}
	}
	return c
}

// peakHeap is the most memory in use while work runs, above what was before, as seen every few milliseconds.
func peakHeap(work func()) uint64 {
	before := fitBase()
	done, most := make(chan struct{}), make(chan uint64)
	go func() {
		top := uint64(0)
		for {
			var m runtime.MemStats
			runtime.ReadMemStats(&m)
			top = max(top, m.HeapAlloc)
			select {
			case <-done:
				most <- top - min(top, before)
				return
			case <-time.After(20 * time.Millisecond):
			}
		}
	}()
	work()
	close(done)
	return <-most
}
