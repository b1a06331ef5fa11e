package model

import (
	"context"
	"errors"
	"math"
	"strings"
	"testing"
)

func TestUnusableTablesAreRefused(t *testing.T) {
	for name, c := range map[string]struct {
		change func(*Table)
		want   error
		says   string
	}{
		"keys":         {func(t *Table) { t.Keys = t.Keys[1:] }, ErrTable, "119 keys"},
		"sources":      {func(t *Table) { t.Sources = t.Sources[1:] }, ErrTable, "119 sources"},
		"values":       {func(t *Table) { t.Columns[1].Values = t.Columns[1].Values[1:] }, ErrTable, `"n01"`},
		"codes":        {func(t *Table) { t.Columns[3].Codes = nil }, ErrTable, `"cultivar"`},
		"size":         {func(t *Table) { t.Columns[0].Size = 0 }, ErrTable, `"n00"`},
		"kind":         {func(t *Table) { t.Columns[0].Kind = 0 }, ErrTable, "kind(0)"},
		"label":        {func(t *Table) { t.Labels[7] = 3 }, ErrTable, "row 7 has class 3 of 3"},
		"source":       {func(t *Table) { t.Sources[8] = 9 }, ErrTable, "row 8 has source 9 of 3"},
		"level":        {func(t *Table) { t.Columns[3].Codes[9] = 4 }, ErrTable, "row 9 has level"},
		"column twice": {func(t *Table) { t.Columns[1].Name = "n00" }, ErrTable, `two columns "n00"`},
		"class twice":  {func(t *Table) { t.Classes[2] = "grade A" }, ErrTable, `"grade A" stands there twice`},
		"no labels":    {func(t *Table) { clearTo(t.Labels, -1) }, ErrTooFew, "0 usable rows, 50 are needed"},
		"few labels":   {func(t *Table) { clearTo(t.Labels[49:], -1) }, ErrTooFew, "49 usable rows"},
		"all infinite": {func(t *Table) { clearTo(t.Columns[0].Values, math.Inf(1)) }, ErrTooFew, "0 usable rows"},
		"one class":    {func(t *Table) { clearTo(t.Labels, 1) }, ErrOneClass, "1 classes have at least 5 rows"},
		"rare others":  {func(t *Table) { clearTo(t.Labels[4:], 1); clearTo(t.Labels[:4], 0) }, ErrOneClass, ""},
	} {
		t.Run(name, func(t *testing.T) {
			table, _ := small.table()
			c.change(table)
			_, err := NewTrainer(quick()).Fit(context.Background(), table)
			if !errors.Is(err, c.want) || !strings.Contains(err.Error(), c.says) {
				t.Errorf("%v; wanted %v that says %q", err, c.want, c.says)
			}
		})
	}
}

func clearTo[T any](s []T, v T) {
	for i := range s {
		s[i] = v
	}
}

func TestKeysAreDistinct(t *testing.T) {
	seen := map[uint64]bool{}
	for row := range int64(100000) {
		seen[Key(row)] = true
	}
	if len(seen) != 100000 {
		t.Errorf("%d keys of 100000 rows", len(seen))
	}
	// First output of SplitMix64 from state 0: Steele, Lea & Flood 2014, as in java.util.SplittableRandom.
	if k := Key(0); k != 0xe220a8397b1dcdaf {
		t.Errorf("key of row 0 is %x", k)
	}
}

func TestTrainerRefusesFoldsOutOfRange(t *testing.T) {
	for _, n := range []int{0, 1, 101} {
		func() {
			defer func() {
				if recover() == nil {
					t.Errorf("%d folds were taken", n)
				}
			}()
			o := DefaultOptions()
			o.Folds = n
			NewTrainer(o)
		}()
	}
}
