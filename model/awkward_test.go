package model

import (
	"context"
	"fmt"
	"math"
	"math/rand/v2"
	"testing"
)

// Tables that real life brings: each must be fitted, cold and warm, and its snapshot saved, without a panic and with
// finite scores.
func TestAwkwardTables(t *testing.T) {
	base := recipe{rows: 150, numbers: 3, classes: 2, apart: 2, wrong: 0.1, seed: 9}
	for name, change := range map[string]func(r *recipe, add func(func(*Table))){
		"as few as can be": func(r *recipe, _ func(func(*Table))) { r.rows = MinRows },
		"150 rows":         func(*recipe, func(func(*Table))) {},
		"26 classes": func(r *recipe, add func(func(*Table))) {
			r.classes, r.rows = 26, 156
			add(func(t *Table) {
				for i := range t.Labels {
					t.Labels[i] = int32(i % 26)
				}
			})
		},
		"no columns": func(r *recipe, _ func(func(*Table))) { r.numbers = 0 },
		"constant columns": func(_ *recipe, add func(func(*Table))) {
			add(func(t *Table) { clearTo(t.Columns[0].Values, 7); clearTo(t.Columns[2].Values, -1) })
		},
		"nothing but constants": func(r *recipe, add func(func(*Table))) {
			r.numbers = 1
			add(func(t *Table) { clearTo(t.Columns[0].Values, 0) })
		},
		"nothing there": func(r *recipe, add func(func(*Table))) {
			r.numbers = 1
			add(func(t *Table) { clearTo(t.Columns[0].Values, nan) })
		},
		"a column missing": func(_ *recipe, add func(func(*Table))) {
			add(func(t *Table) { clearTo(t.Columns[1].Values, nan) })
		},
		"a category missing": func(r *recipe, add func(func(*Table))) {
			r.category = true
			add(func(t *Table) { clearTo(t.Columns[3].Codes, -1) })
		},
		"the same column thrice": func(_ *recipe, add func(func(*Table))) {
			add(func(t *Table) { t.Columns[1].Values = t.Columns[0].Values; t.Columns[2].Values = t.Columns[0].Values })
		},
		"the same row everywhere but for its label": func(_ *recipe, add func(func(*Table))) {
			add(func(t *Table) {
				for k := range t.Columns {
					clearTo(t.Columns[k].Values[20:], t.Columns[k].Values[0])
				}
			})
		},
		"10,000 levels": func(r *recipe, add func(func(*Table))) { add(manyLevels) },
		"a vector":      func(_ *recipe, add func(func(*Table))) { add(vector) },
		"99.5 % one class": func(r *recipe, add func(func(*Table))) {
			r.rows = 1200
			add(func(t *Table) { clearTo(t.Labels, 0); clearTo(t.Labels[594:600], 1) })
		},
		"labels at random":           func(r *recipe, _ func(func(*Table))) { r.apart = 0 },
		"no wrong labels, far apart": func(r *recipe, _ func(func(*Table))) { r.apart, r.wrong = 30, 0 },
		"half the labels wrong":      func(r *recipe, _ func(func(*Table))) { r.wrong = 0.5 },
		"half the values missing":    func(r *recipe, _ func(func(*Table))) { r.missing = 0.5; r.category = true },
		"huge and tiny numbers":      func(_ *recipe, add func(func(*Table))) { add(extremes) },
		"half the rows without a label": func(_ *recipe, add func(func(*Table))) {
			add(func(t *Table) { clearTo(t.Labels[:75], -1) })
		},
		"a source a row": func(_ *recipe, add func(func(*Table))) { add(manySources) },
		"all sources missing": func(r *recipe, add func(func(*Table))) {
			r.sources = 2
			add(func(t *Table) { clearTo(t.Sources, -1) })
		},
		"all rows in one fold": func(_ *recipe, add func(func(*Table))) {
			add(func(t *Table) { clearTo(t.Keys, 12) })
		},
		"empty names": func(_ *recipe, add func(func(*Table))) {
			add(func(t *Table) { t.Classes[0] = ""; t.Columns[1].Name = "" })
		},
	} {
		t.Run(name, func(t *testing.T) {
			r := base
			var changes []func(*Table)
			change(&r, func(f func(*Table)) { changes = append(changes, f) })
			tr := NewTrainer(quick())
			for i := range 2 {
				r.first = int64(i * r.rows / 20)
				table, _ := r.table()
				for _, f := range changes {
					f(table)
				}
				res, err := tr.Fit(context.Background(), table)
				if err != nil {
					t.Fatal(err)
				}
				if res.Snapshot.Facts().Warm != (i > 0) {
					t.Errorf("fit %d: warm %v", i, i == 0)
				}
				wantFinite(t, table, res.Scores)
				wantFinite(t, table, scores(t, loaded(t, saved(t, res.Snapshot)), table))
			}
		})
	}
}

// wantFinite wants a probability for every row, or a reason.
func wantFinite(t *testing.T, table *Table, s []Score) {
	t.Helper()
	for i, v := range s {
		if v.Reason == Scored && (!(v.P >= 0 && v.P <= 1) || math.IsNaN(v.Margin) || math.IsInf(v.Margin, 0) || v.Implied < 0) {
			t.Fatalf("row %d: %+v", i, v)
		}
		if want := table.Labels[i] >= 0; (v.Reason == Scored) != want && v.Reason != NewClass {
			t.Fatalf("row %d: %q with label %d", i, v.Reason, table.Labels[i])
		}
	}
}

func manyLevels(t *Table) {
	c := Column{Name: "crate", Kind: Category}
	for l := range 10000 {
		c.Levels = append(c.Levels, fmt.Sprintf("crate %05d", l))
	}
	for i := range t.Labels {
		c.Codes = append(c.Codes, int32(i*7919%10000)>>(i%3*3))
	}
	t.Columns = append(t.Columns, c)
}

func vector(t *Table) {
	rng := rand.New(rand.NewPCG(1, 1))
	c := Column{Name: "spectrum", Kind: Vector, Size: 32}
	for _, l := range t.Labels {
		for range c.Size {
			c.Values = append(c.Values, rng.NormFloat64()+float64(l))
		}
	}
	t.Columns = append(t.Columns, c)
}

func extremes(t *Table) {
	for i := range t.Labels {
		t.Columns[0].Values[i] *= 1e307
		t.Columns[1].Values[i] *= 1e-320
		if i%2 == 0 {
			t.Columns[2].Values[i] = math.Copysign(math.MaxFloat64, t.Columns[2].Values[i])
		}
	}
}

func manySources(t *Table) {
	t.Sources = nil
	for i := range t.Labels {
		t.Sources = append(t.Sources, int32(i))
		t.SourceNames = append(t.SourceNames, fmt.Sprintf("picker %d", i))
	}
}
