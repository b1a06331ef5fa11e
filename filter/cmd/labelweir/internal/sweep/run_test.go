package sweep

import (
	"errors"
	"math"
	"reflect"
	"testing"

	"labelweir/connectors/table"
	"labelweir/filter"
	"labelweir/model"
)

func TestTheGateIsAboveNotAt(t *testing.T) {
	report := func(share float64) *filter.Report {
		return &filter.Report{Noise: &filter.Noise{Share: filter.Rate{Value: filter.Number(share)}}}
	}
	for _, c := range []struct {
		r     *filter.Report
		gate  float64
		above bool
		err   error
	}{
		{report(0.05), 0, false, nil},
		{report(0.05), 0.05, false, nil},
		{report(0.051), 0.05, true, nil},
		{report(math.NaN()), 0.05, false, ErrGate},
		{&filter.Report{}, 0.05, false, ErrGate},
		{&filter.Report{}, 0, false, nil},
	} {
		if above, err := Above(c.r, c.gate); above != c.above || !errors.Is(err, c.err) {
			t.Errorf("gate %v: %v, %v", c.gate, above, err)
		}
	}
}

func TestEveryColumnIsInTheReport(t *testing.T) {
	got := used([]table.Choice{
		{Column: "grade", Why: "the label"},
		{Column: "at", Why: "the time"},
		{Column: "who", Why: "the source"},
		{Column: "size", Used: true, Kind: model.Number},
		{Column: "size#2", Used: true, Kind: model.Category, Why: "name repeated"},
		{Column: "id", Why: "counts the rows"},
	})
	want := []filter.FieldUse{
		{Path: "grade", Use: "label"},
		{Path: "at", Use: "time"},
		{Path: "who", Use: "source"},
		{Path: "size", Use: "feature", Kind: "number"},
		{Path: "size#2", Use: "feature", Kind: "category", Why: "name repeated"},
		{Path: "id", Use: "left-out", Why: "counts the rows"},
	}
	if !reflect.DeepEqual(got, want) {
		t.Errorf("got %+v", got)
	}
}
