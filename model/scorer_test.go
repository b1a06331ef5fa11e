package model

import (
	"errors"
	"math"
	"slices"
	"strings"
	"testing"

	"pgregory.net/rapid"
)

func TestScorerSaysWhyItDoesNotScore(t *testing.T) {
	table, _ := small.table()
	s := fit(t, quick(), table).Snapshot
	rows := small
	rows.first, rows.rows, rows.missing = 200, 8, 0
	fresh, _ := rows.table()
	fresh.Classes = append(fresh.Classes, "windfall")
	fresh.Labels[0] = -1
	fresh.Labels[1] = 3
	fresh.Columns[0].Values[2] = math.Inf(1)
	fresh.Columns[2].Values[3] = math.Inf(-1)
	fresh.Columns[1].Values[4] = nan
	fresh.Columns[3].Codes[5] = -1
	fresh.Columns[3].Levels = append(fresh.Columns[3].Levels, "Discovery")
	fresh.Columns[3].Codes[6] = 4
	fresh.SourceNames = append(fresh.SourceNames, "line 9")
	fresh.Sources[7] = 3
	got := scores(t, s, fresh)
	for i, want := range []Reason{NoLabel, NewClass, NotFinite, NotFinite, Scored, Scored, Scored, Scored} {
		if got[i].Reason != want {
			t.Errorf("row %d: %q, wanted %q", i, got[i].Reason, want)
		}
		if want != Scored && !(math.IsNaN(got[i].P) && math.IsNaN(got[i].Margin) && got[i].Implied == -1) {
			t.Errorf("row %d has a score: %+v", i, got[i])
		}
	}
	for i, v := range got[4:] {
		if !(v.P >= 0 && v.P <= 1) || v.Margin-v.Margin != 0 || v.Implied < 0 {
			t.Errorf("row %d: %+v", 4+i, v)
		}
	}
}

func TestScorerWantsTheColumnsItKnows(t *testing.T) {
	table, _ := small.table()
	sc := fit(t, quick(), table).Snapshot.NewScorer()
	for name, c := range map[string]struct {
		change func(*Table)
		says   string
	}{
		"gone":    {func(t *Table) { t.Columns = t.Columns[1:] }, `no column "n00"`},
		"renamed": {func(t *Table) { t.Columns[3].Name = "Cultivar" }, `no column "cultivar"`},
		"a category now": {func(t *Table) {
			t.Columns[1] = Column{Name: "n01", Kind: Category, Size: 1, Codes: make([]int32, t.Rows()), Levels: []string{"x"}}
		}, `column "n01" is category of 0, was number of 1`},
		"a vector now": {func(t *Table) {
			t.Columns[1] = Column{Name: "n01", Kind: Vector, Size: 2, Values: make([]float64, 2*t.Rows())}
		}, `column "n01" is vector of 2, was number of 1`},
	} {
		t.Run(name, func(t *testing.T) {
			other, _ := small.table()
			c.change(other)
			err := sc.Score(other, 0, 5, make([]Score, 5))
			if !errors.Is(err, ErrSchema) || !strings.Contains(err.Error(), c.says) {
				t.Errorf("%v; wanted it to say %q", err, c.says)
			}
		})
	}
	if err := sc.Score(table, 0, 5, make([]Score, 5)); err != nil {
		t.Errorf("after the others: %v", err)
	}
}

// A row's score does not depend on the rows beside it, the order of columns and names, or other columns.
func TestScoreIsTheRowsOwn(t *testing.T) {
	table, _ := small.table()
	s := fit(t, quick(), table).Snapshot
	rows := small
	rows.first, rows.rows = 300, 2100 // more than a block
	fresh, _ := rows.table()
	want := scores(t, s, fresh)
	turned := *fresh
	turned.Columns = append(slices.Clone(fresh.Columns), Column{Name: "ticket", Kind: Number, Size: 1, Values: slices.Repeat([]float64{math.Inf(1)}, rows.rows)})
	slices.Reverse(turned.Columns)
	sc := s.NewScorer()
	rapid.Check(t, func(rt *rapid.T) {
		t := fresh
		if rapid.Bool().Draw(rt, "turned columns") {
			t = &turned
		}
		lo := rapid.IntRange(0, rows.rows).Draw(rt, "lo")
		hi := min(rows.rows, lo+rapid.SampledFrom([]int{0, 1, 2, 3, 5, 64, 513}).Draw(rt, "rows"))
		got := make([]Score, hi-lo)
		if err := sc.Score(t, lo, hi, got); err != nil {
			rt.Fatal(err)
		}
		if !sameScores(got, want[lo:hi]) {
			rt.Fatalf("rows %d to %d score otherwise than among all", lo, hi)
		}
	})
}

func TestScoringAllocatesNothing(t *testing.T) {
	table, _ := small.table()
	s := fit(t, quick(), table).Snapshot
	for _, rows := range []int{1, 100} {
		sc, dst := s.NewScorer(), make([]Score, rows)
		if n := testing.AllocsPerRun(20, func() {
			if err := sc.Score(table, 0, rows, dst); err != nil {
				t.Fatal(err)
			}
		}); n != 0 {
			t.Errorf("%v allocations for %d rows", n, rows)
		}
	}
}

func TestReasonsHaveTheirNames(t *testing.T) {
	var names []string
	for r := Scored; r <= InputsChanged; r++ {
		names = append(names, r.String())
	}
	if got := strings.Join(names, " "); got != " no-label new-class not-finite warming-up inputs-changed" {
		t.Error(got)
	}
}
