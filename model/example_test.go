package model_test

import (
	"context"
	"fmt"
	"log"

	"labelweir/model"
)

// Apples are sorted into two grades by weight; the weights of the grades hardly overlap. One heavy apple is labelled
// small.
func Example() {
	weight := model.Column{Name: "weight_g", Kind: model.Number, Size: 1}
	table := &model.Table{Classes: []string{"small", "large"}}
	for i := range 200 {
		grade := int32(i % 2)
		weight.Values = append(weight.Values, 130+60*float64(grade)+float64(i*37%50-25))
		table.Labels = append(table.Labels, grade)
		table.Keys = append(table.Keys, model.Key(int64(i)))
	}
	table.Columns = []model.Column{weight}
	table.Labels[101] = 0 // 210 g or so

	result, err := model.NewTrainer(model.DefaultOptions()).Fit(context.Background(), table)
	if err != nil {
		log.Fatal(err)
	}
	for i, s := range result.Scores {
		if s.P > 0.5 {
			fmt.Printf("row %d, %.0f g, is labelled %s; more likely it is %s\n",
				i, weight.Values[i], table.Classes[table.Labels[i]], result.Snapshot.Facts().Classes[s.Implied])
		}
	}

	// The snapshot judges rows it has not seen.
	fresh := &model.Table{Classes: table.Classes, Labels: []int32{1, 1},
		Columns: []model.Column{{Name: "weight_g", Kind: model.Number, Size: 1, Values: []float64{201, 121}}}}
	scores := make([]model.Score, 2)
	if err := result.Snapshot.NewScorer().Score(fresh, 0, 2, scores); err != nil {
		log.Fatal(err)
	}
	for i, s := range scores {
		fmt.Printf("%.0f g as large: wrong is more likely than not: %v\n", fresh.Columns[0].Values[i], s.P > 0.5)
	}
	// Output:
	// row 101, 202 g, is labelled small; more likely it is large
	// 201 g as large: wrong is more likely than not: false
	// 121 g as large: wrong is more likely than not: true
}
