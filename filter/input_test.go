package filter

import (
	"context"
	"errors"
	"math"
	"slices"
	"strings"
	"testing"

	"labelweir/model"
)

// Whatever differs between the two readings of an input is noticed, and nothing is committed.
func TestChangedInputIsRefused(t *testing.T) {
	for name, change := range map[string]func([]apple) []apple{
		"a value":              func(a []apple) []apple { a[700].diameter += 1e-9; return a },
		"a level":              func(a []apple) []apple { a[701].cultivar = a[702].cultivar + "x"; return a },
		"a label":              func(a []apple) []apple { a[703].observed = ""; return a },
		"a source":             func(a []apple) []apple { a[704].grader = "another"; return a },
		"a time":               func(a []apple) []apple { a[705].time++; return a },
		"two rows changed":     func(a []apple) []apple { a[706], a[707] = a[707], a[706]; return a },
		"a row less":           func(a []apple) []apple { return a[:999] },
		"a row more":           func(a []apple) []apple { return append(a, a[0]) },
		"no row":               func(a []apple) []apple { return nil },
		"all classes renamed":  func(a []apple) []apple { return renamed(a, func(p *apple) *string { return &p.observed }) },
		"all levels renamed":   func(a []apple) []apple { return renamed(a, func(p *apple) *string { return &p.cultivar }) },
		"all sources renamed":  func(a []apple) []apple { return renamed(a, func(p *apple) *string { return &p.grader }) },
		"nothing, but batches": nil,
	} {
		t.Run(name, func(t *testing.T) {
			apples := pack(1000, 0.1, 0, 1)
			r := newRun(apples, nil)
			n, crate := 0, r.crate
			r.crate = func() *crateT {
				k := crate()
				if n++; n == 2 && change != nil {
					k.apples = change(slices.Clone(apples))
				} else if n == 2 {
					k.sizes = []int{33, 1}
				}
				return k
			}
			if change == nil {
				r.do(t)
				return
			}
			_, err := r.sweep.Run(context.Background())
			var ce *ChangedError
			if !errors.Is(err, ErrChanged) || !errors.As(err, &ce) || ce.FirstRows != 1000 {
				t.Fatalf("got %v", err)
			}
			if r.store.committed || !r.store.closed || r.open.Load() != 0 {
				t.Errorf("committed %v, closed %v, %d not given back", r.store.committed, r.store.closed, r.open.Load())
			}
		})
	}
}

func renamed(list []apple, field func(*apple) *string) []apple {
	for i := range list {
		*field(&list[i]) += "x"
	}
	return list
}

func TestChangedErrorSaysWhatToDo(t *testing.T) {
	for _, c := range []struct {
		err  ChangedError
		want string
	}{
		{ChangedError{10, 12}, "input changed while it was read: 10 rows at first, then 12; run again when nothing writes to it"},
		{ChangedError{10, 10}, "input changed while it was read: still 10 rows, but other values; run again when nothing writes to it"},
	} {
		if got := c.err.Error(); got != c.want {
			t.Errorf("got  %s\nwant %s", got, c.want)
		}
	}
}

// A source that breaks its promise is named for it.
func TestBrokenPromisesOfASource(t *testing.T) {
	for name, c := range map[string]struct {
		change func(*Batch)
		word   string
	}{
		"gap":           {func(b *Batch) { b.First += 2 }, "row 102 comes after row 99"},
		"repeat":        {func(b *Batch) { b.First = 0 }, "row 0 comes after row 99"},
		"missing keys":  {func(b *Batch) { b.Table.Keys = b.Table.Keys[1:] }, "batch at row 100 has 99 keys for 100 rows"},
		"missing times": {func(b *Batch) { b.Times = b.Times[1:] }, "batch at row 100 has 99 times for 100 rows"},
	} {
		for _, mode := range []string{"whole", "sliding"} {
			t.Run(name+", "+mode, func(t *testing.T) {
				r := newRun(pack(1000, 0.1, 0, 1), modes()[mode])
				open := r.sweep.Open
				r.sweep.Open = func(ctx context.Context) (Source, error) {
					s, err := open(ctx)
					return &tampered{Source: s, change: c.change}, err
				}
				_, err := r.sweep.Run(context.Background())
				if !errors.Is(err, ErrBatch) || !strings.Contains(err.Error(), c.word) {
					t.Errorf("got %v, want %q in it", err, c.word)
				}
				if r.open.Load() != 0 {
					t.Errorf("%d not given back", r.open.Load())
				}
			})
		}
	}
}

// tampered changes the second batch.
type tampered struct {
	Source
	n      int
	change func(*Batch)
}

func (s *tampered) Next(ctx context.Context) (*Batch, error) {
	b, err := s.Source.Next(ctx)
	if s.n++; s.n == 2 && err == nil {
		s.change(b)
	}
	return b, err
}

func TestSpanWantsTimes(t *testing.T) {
	r := newRun(pack(1000, 0.1, 0, 1), modes()["span"])
	crate := r.crate
	r.crate = func() *crateT { k := crate(); k.untimed = true; return k }
	if _, err := r.sweep.Run(context.Background()); !errors.Is(err, ErrNoTime) {
		t.Errorf("got %v", err)
	}
	for _, mode := range []string{"whole", "sliding"} {
		r := newRun(pack(1000, 0.1, 0, 1), modes()[mode])
		crate := r.crate
		r.crate = func() *crateT { k := crate(); k.untimed = true; return k }
		r.do(t)
	}
}

// Rows that can't be scored say why, in both ways to sweep.
func TestUnscoredRowsSayWhy(t *testing.T) {
	for _, mode := range []string{"whole", "sliding"} {
		apples := pack(3000, 0, 0, 1)
		apples[2000].observed = ""
		apples[2001].diameter = math.Inf(1)
		apples[2999].observed = "windfall" // beyond the last retrain of the sliding window
		r := newRun(apples, modes()[mode])
		r.learn.without = "windfall"
		r.do(t)
		for row, want := range map[int]model.Reason{2000: model.NoLabel, 2001: model.NotFinite, 2999: model.NewClass, 1000: model.Scored} {
			if got := r.store.tags[row].Reason; got != want {
				t.Errorf("%s: row %d has the reason %q, want %q", mode, row, got, want)
			}
		}
	}
}

// Too little to learn from is no error: all pass unscored, and the report says so.
func TestTooLittleToLearnFrom(t *testing.T) {
	oneClass := pack(900, 0, 0, 1)
	for i := range oneClass {
		oneClass[i].observed = "first"
	}
	unlabelled := renamed(pack(60, 0, 0, 1), func(p *apple) *string { p.observed = ""; return &p.grader })
	for name, c := range map[string]struct {
		apples []apple
		note   string
		reason model.Reason
	}{
		"too few":   {pack(20, 0, 0, 1), "too few labelled rows to learn from", model.WarmingUp},
		"one class": {oneClass, "only one class has enough rows", model.WarmingUp},
		"no label":  {unlabelled, "none has a label", model.NoLabel},
		"no row":    {nil, "none has a label", model.NoLabel},
	} {
		for _, mode := range []string{"whole", "sliding", "hold"} {
			t.Run(name+", "+mode, func(t *testing.T) {
				r := newRun(c.apples, modes()[mode]).do(t)
				for i, tag := range r.store.tags {
					if tag.Verdict != Unscored || tag.Reason != c.reason || tag.Snapshot != "" || tag.Implied != "" {
						t.Fatalf("row %d: %+v", i, tag)
					}
				}
				if len(r.report.Notes) == 0 || !strings.HasPrefix(r.report.Notes[0], "no record could be scored: ") ||
					!strings.Contains(r.report.Notes[0], c.note) || strings.Contains(r.report.Notes[0], "-1") {
					t.Errorf("notes %q", r.report.Notes)
				}
				if r.report.Noise != nil || r.report.Snapshot != "" || r.report.Choice != nil {
					t.Errorf("the report claims a snapshot: %+v", r.report)
				}
			})
		}
	}
}
