package window_test

import (
	"fmt"

	"labelweir/model"
	"labelweir/window"
)

// A window of the latest two graded apples.
func Example() {
	p := window.Default()
	p.Records = 2
	w, err := window.New(p)
	if err != nil {
		fmt.Println(err)
		return
	}
	apples := &model.Table{
		Columns: []model.Column{{Name: "diameter_mm", Kind: model.Number, Size: 1, Values: []float64{71, 64, 80}}},
		Labels:  []int32{0, 1, 0},
		Keys:    []uint64{model.Key(0), model.Key(1), model.Key(2)},
		Classes: []string{"first", "second"},
	}
	if err := w.Append(apples, 0, nil, 0, apples.Rows()); err != nil {
		fmt.Println(err)
		return
	}
	v := w.View()
	fmt.Println(v.Rows, v.Table.Columns[0].Values)
	// Output: [1 2] [64 80]
}
