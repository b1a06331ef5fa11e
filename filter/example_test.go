package filter_test

import (
	"context"
	"fmt"
	"io"

	"labelweir/filter"
	"labelweir/model"
)

// apples is a source of one batch: two apples without a grade.
type apples struct{ given bool }

func (a *apples) Next(context.Context) (*filter.Batch, error) {
	if a.given {
		return nil, io.EOF
	}
	a.given = true
	return &filter.Batch{
		Table: &model.Table{
			Columns: []model.Column{{Name: "diameter_mm", Kind: model.Number, Size: 1, Values: []float64{71, 64}}},
			Labels:  []int32{-1, -1},
			Keys:    []uint64{model.Key(0), model.Key(1)},
		},
		Release: func() {},
	}, nil
}

func (a *apples) Close() error { return nil }

// printer is a sink that prints each tag.
type printer struct{}

func (printer) Deliver(_ context.Context, b *filter.Batch, tags []filter.Tag) error {
	for i, t := range tags {
		fmt.Println("row", b.First+int64(i), t.Verdict, t.Reason)
	}
	return nil
}

func (printer) Commit(context.Context) error { return nil }
func (printer) Close() error                 { return nil }

func ExampleSweep() {
	s := filter.Sweep{
		Config: filter.Default(),
		Open:   func(context.Context) (filter.Source, error) { return &apples{}, nil },
		Sink:   printer{},
	}
	report, err := s.Run(context.Background())
	if err != nil {
		fmt.Println(err)
		return
	}
	fmt.Println(report.Notes[0])
	// Output:
	// row 0 unscored no-label
	// row 1 unscored no-label
	// no record could be scored: none has a label
}
