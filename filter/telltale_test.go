package filter

import (
	"math"
	"math/rand/v2"
	"strings"
	"testing"

	"labelweir/model"
)

// lot is a table of n graded apples with three honest columns; the grade follows the first loosely.
func lot(n, classes int, seed uint64) *model.Table {
	rng := rand.New(rand.NewPCG(seed, 1))
	t := &model.Table{Columns: []model.Column{
		{Name: "diameter_mm", Kind: model.Number, Size: 1}, {Name: "firmness_n", Kind: model.Number, Size: 1},
		{Name: "cultivar", Kind: model.Category, Levels: []string{"Topaz", "Elstar"}}}}
	for c := range classes {
		t.Classes = append(t.Classes, strings.Repeat("I", c+1))
	}
	for i := range n {
		c := rng.IntN(classes)
		t.Labels, t.Keys = append(t.Labels, int32(c)), append(t.Keys, model.Key(int64(i)))
		t.Columns[0].Values = append(t.Columns[0].Values, float64(c)+rng.NormFloat64())
		t.Columns[1].Values = append(t.Columns[1].Values, rng.NormFloat64())
		t.Columns[2].Codes = append(t.Columns[2].Codes, int32(rng.IntN(2)))
	}
	return t
}

// Columns made from the label are named, honest ones are not, however rare the other labels are.
func TestColumnsThatTellTheLabelAreNamed(t *testing.T) {
	for name, c := range map[string]struct {
		table *model.Table
		leak  func(t *model.Table, i int) // changes row i
		want  string
	}{
		"honest":   {lot(3000, 3, 1), func(*model.Table, int) {}, ""},
		"a number": {lot(9000, 3, 2), func(t *model.Table, i int) { t.Columns[1].Values[i] = 10 * float64(t.Labels[i]) }, `"firmness_n" alone tells the label`},
		"a number of 60 classes": {lot(6000, 60, 3), func(t *model.Table, i int) { t.Columns[1].Values[i] = float64(t.Labels[i]) },
			`"firmness_n" alone tells the label`},
		"missing where the label is II": {lot(900, 2, 4), func(t *model.Table, i int) {
			if t.Labels[i] == 1 {
				t.Columns[1].Values[i] = math.NaN()
			}
		}, `"firmness_n" alone tells the label`},
		"a text": {lot(900, 2, 5), func(t *model.Table, i int) { t.Columns[2].Codes[i] = 1 - t.Labels[i] }, `"cultivar" alone tells the label`},
		"one in ten otherwise": {lot(900, 2, 6), func(t *model.Table, i int) {
			if i%10 > 0 {
				t.Columns[2].Codes[i] = t.Labels[i]
			}
		}, ""},
		"a level for each row": {lot(900, 2, 7), func(t *model.Table, i int) { t.Columns[2].Codes[i] = int32(i) }, ""},
		"one label in 200 otherwise": {lot(4000, 2, 8), func(t *model.Table, i int) {
			t.Labels[i] = 0
			if i%200 == 0 {
				t.Labels[i] = 1
			}
		}, ""},
		"nothing varies": {lot(200, 2, 9), func(t *model.Table, i int) {
			t.Columns[0].Values[i], t.Columns[1].Values[i], t.Columns[2].Codes[i] = 7, math.NaN(), 1
		}, "nothing can be learned"},
	} {
		for i := range c.table.Labels {
			c.leak(c.table, i)
		}
		notes := strings.Join(telltales(c.table), "\n")
		if notes == "" != (c.want == "") || !strings.Contains(notes, c.want) || strings.Count(notes, "\n") > 0 {
			t.Errorf("%s: %q, wanted %q", name, notes, c.want)
		}
	}
}
