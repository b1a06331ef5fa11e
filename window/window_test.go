package window

import (
	"errors"
	"slices"
	"strings"
	"sync"
	"testing"
	"time"

	"labelweir/model"
)

func TestPolicyFaultsAreReportedAtOnce(t *testing.T) {
	if err := Default().Validate(); err != nil {
		t.Errorf("the defaults are refused: %v", err)
	}
	_, err := New(Policy{Records: 0, Span: -1, Bytes: 0, Keep: 9, Floor: -1})
	if !errors.Is(err, ErrPolicy) {
		t.Fatalf("%v does not wrap ErrPolicy", err)
	}
	for _, word := range []string{"records is 0", "span is -1ns", "bytes is 0", "keep is 9", "floor is -1"} {
		if !strings.Contains(err.Error(), word) {
			t.Errorf("%q is not in %q", word, err)
		}
	}
	if _, err = New(Policy{Records: 1, Bytes: 1, Keep: Latest, Span: 1}); !errors.Is(err, ErrPolicy) {
		t.Errorf("Latest with a span gives %v", err)
	}
}

func TestOtherColumnsAreRefused(t *testing.T) {
	base := func() *model.Table { return numbers(0, 3, 0) }
	for name, change := range map[string]func(*model.Table){
		"name": func(t *model.Table) { t.Columns[0].Name = "y" },
		"kind": func(t *model.Table) { t.Columns[0].Kind = model.Vector },
		"size": func(t *model.Table) { t.Columns[0].Size = 2 },
		"one more": func(t *model.Table) {
			t.Columns = append(t.Columns, model.Column{Name: "z", Kind: model.Number, Size: 1})
		},
	} {
		t.Run(name, func(t *testing.T) {
			w := must(t, Default())
			if err := w.Append(base(), 0, nil, 0, 3); err != nil {
				t.Fatal(err)
			}
			other := base()
			change(other)
			if err := w.Append(other, 3, nil, 0, 3); !errors.Is(err, ErrColumns) {
				t.Errorf("got %v", err)
			}
			if n := len(w.View().Rows); n != 3 {
				t.Errorf("%d rows after the refusal, want 3", n)
			}
		})
	}
}

func TestTooFewBytesAreRefused(t *testing.T) {
	p := Default()
	p.Bytes = 63 * 40 // a row takes 32 bytes and its 8 of x
	w := must(t, p)
	err := w.Append(numbers(0, 3, 0), 0, nil, 0, 3)
	if !errors.Is(err, ErrBytes) || !strings.Contains(err.Error(), "a row takes 40 bytes") {
		t.Errorf("got %v", err)
	}
}

func TestFallingRowNumbersPanic(t *testing.T) {
	w := must(t, Default())
	add(t, w, 10, 5, 0, 0)
	defer func() {
		if got := recover(); got != "window: row 14 appended after row 14" {
			t.Errorf("recovered %v", got)
		}
	}()
	add(t, w, 14, 1, 0, 0)
}

func TestRowsWithoutLabelArePassedOver(t *testing.T) {
	w := must(t, Default())
	table := numbers(0, 4, 0)
	table.Labels[1], table.Labels[2] = -1, -1
	if err := w.Append(table, 0, nil, 0, 4); err != nil {
		t.Fatal(err)
	}
	v := w.View()
	if want := []int64{0, 3}; !slices.Equal(v.Rows, want) {
		t.Errorf("rows %v, want %v", v.Rows, want)
	}
	if got := w.Stats().Arrived; got != 2 {
		t.Errorf("%d arrived, want 2", got)
	}
	if v.Index(1) != -1 {
		t.Error("row 1 is said to be there")
	}
}

func TestEmptyWindowGivesAnEmptyView(t *testing.T) {
	v := must(t, Default()).View()
	if len(v.Rows) != 0 || v.Table.Rows() != 0 || v.Stands != 0 {
		t.Errorf("%+v", v)
	}
}

// A view is a copy: it stays what it was while the writer goes on in another goroutine. The race detector looks on.
func TestViewStaysWhileTheWriterGoesOn(t *testing.T) {
	for _, keep := range []Keep{Latest, Uniform} {
		w := must(t, Policy{Records: 500, Bytes: 1 << 20, Keep: keep, Floor: 5, Seed: 1})
		add(t, w, 0, 2000, 7, 0)
		v := w.View()
		rows := slices.Clone(v.Rows)
		var group sync.WaitGroup
		group.Go(func() { add(t, w, 2000, 20_000, 7, 0) })
		for i, r := range v.Rows {
			if v.Table.Columns[0].Values[i] != float64(r) || v.Table.Keys[i] != model.Key(r) {
				t.Errorf("row %d holds %v", r, v.Table.Columns[0].Values[i])
			}
		}
		group.Wait()
		if !slices.Equal(rows, v.Rows) {
			t.Error("the row numbers changed")
		}
	}
}

// After it has filled up once, a window makes no garbage but for the heaps of thinning.
func TestAppendToAFullWindowAllocatesNothing(t *testing.T) {
	w := must(t, Policy{Records: 4096, Bytes: 1 << 20, Keep: Latest, Seed: 1})
	add(t, w, 0, 20_000, 0, 0)
	row := int64(20_000)
	table := numbers(row, 1024, 0)
	if n := testing.AllocsPerRun(50, func() {
		if err := w.Append(table, row, nil, 0, 1024); err != nil {
			t.Fatal(err)
		}
		row += 1024
	}); n > 0 {
		t.Errorf("%v allocations a batch", n)
	}
}

func TestClockWaitsForAQuorum(t *testing.T) {
	const span = 100 * time.Second
	w := must(t, Policy{Records: 1000, Span: span, Bytes: 1 << 20, Keep: Uniform, Seed: 1})
	add(t, w, 0, 200, 0, time.Second)
	const before = 100 // once seven more rows have let the last of these count
	for i, c := range []struct {
		name  string
		times []int64
		rows  int // in the view afterwards
		late  int64
		ahead int64
	}{
		{"seven rows from next year do not empty the window", slices.Repeat([]int64{1 << 55}, 7), before + 7, 0, 7},
		{"nor do rows without a time", slices.Repeat([]int64{unknown}, 70), before + 77, 0, 7},
		{"late rows stay out", []int64{0, int64(time.Second)}, before + 77, 2, 7},
		{"but eight close together are the present", slices.Repeat([]int64{1 << 56}, 8), 1, 2, 14},
	} {
		first := int64(1000 * (i + 1))
		if err := w.Append(numbers(first, len(c.times), 0), first, c.times, 0, len(c.times)); err != nil {
			t.Fatal(err)
		}
		s := w.Stats()
		if got := len(w.View().Rows); got != c.rows || s.Late != c.late || s.Ahead != c.ahead {
			t.Errorf("%s: %d rows, %d late, %d ahead; want %d, %d, %d", c.name, got, s.Late, s.Ahead, c.rows, c.late, c.ahead)
		}
	}
}

func TestSpansAtTheEndsOfTime(t *testing.T) {
	c := clock{now: 1<<63 - 1}
	if !c.old(-1<<62, time.Hour) || c.old(1<<63-2, time.Hour) || c.wild(1<<63-1, 1) {
		t.Error("the latest time there is")
	}
	c.now = -1<<63 + 1
	if c.old(-1<<63+1, 1) || !c.wild(1<<63-1, 1<<63-1) || c.old(5, 1) {
		t.Error("the earliest time there is")
	}
}
