package filter

import (
	"slices"
	"testing"

	"labelweir/model"
)

// rowsOf gives the row numbers a table holds, of an input of n rows.
func rowsOf(t *model.Table, n int) []int {
	number := make(map[uint64]int, n)
	for i := range n {
		number[model.Key(int64(i))] = i
	}
	rows := make([]int, len(t.Keys))
	for i, k := range t.Keys {
		rows[i] = number[k]
	}
	return rows
}

// Once the grades have taken on another meaning and a first fit's rows have come in since, no fit sees older ones again,
// and rows are scored anew. Those that came before and still wait are judged by what they meant.
func TestAfterAChangeOnlyNewRowsAreTrainedOn(t *testing.T) {
	const rows, turn, slack = 8000, 4000, 20 // slack: the onset comes early or late by as much
	apples := pack(rows, 0.05, turn, 6)
	for _, hold := range []int{0, 200, 1500} {
		r := newRun(apples, func(c *Config) { c.Sliding, c.Records, c.Hold = true, 2000, hold }).do(t)
		cut := slices.IndexFunc(r.learn.tables, func(x *model.Table) bool { return slices.Min(rowsOf(x, rows)) >= turn-slack })
		if cut < 0 {
			t.Fatalf("hold %d: no fit without the rows before the change", hold)
		}
		first := rowsOf(r.learn.tables[cut], rows)
		if n, last := len(first), slices.Max(first); n < leastFirst || last > turn+slack+leastFirst+100 { // a retrain every 100
			t.Errorf("hold %d: the first fit after the change has %d rows, the last %d", hold, n, last)
		}
		for _, later := range r.learn.tables[cut:] {
			if from := slices.Min(rowsOf(later, rows)); from < turn-slack {
				t.Fatalf("hold %d: a later fit sees row %d", hold, from)
			}
		}
		if n := r.learn.tables[len(r.learn.tables)-1].Rows(); n != 2000 {
			t.Errorf("hold %d: the last fit has %d rows, want a full window", hold, n)
		}
		unscored, astray := 0, 0
		for i, tag := range r.store.tags {
			if tag.Verdict == Unscored {
				unscored++
			} else if i < turn-slack || i > turn+slack+120 { // the alarm comes at most 120 late
				if flagged := tag.Verdict != Pass; flagged != (apples[i].observed != apples[i].truth) {
					astray++
				}
			}
		}
		if most := max(0, leastFirst+slack+100-hold); unscored > most || astray > 40 {
			t.Errorf("hold %d: %d rows unscored, at most %d expected; %d judged wrongly", hold, unscored, most, astray)
		}
		if r.report.Breaker.Open {
			t.Errorf("hold %d: the breaker is still open", hold)
		}
	}
}

// A burst of wrong labels that is over before a first fit's rows have come in leaves the window whole.
func TestShortBurstLeavesTheWindowWhole(t *testing.T) {
	apples := pack(6000, 0.05, 0, 6)
	for i := range 100 {
		apples[4000+i].observed = grades()[i%3]
	}
	r := newRun(apples, func(c *Config) { c.Sliding, c.Records = true, 2000 }).do(t)
	if b := r.report.Breaker; b.Opened != 1 || b.Open {
		t.Fatalf("%+v", b)
	}
	for i, x := range r.learn.tables {
		if x.Rows() != min(2000, 500+100*i) {
			t.Errorf("fit %d has %d rows", i, x.Rows())
		}
	}
}
