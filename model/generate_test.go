package model

import (
	"fmt"
	"math"
	"math/rand/v2"
)

// recipe describes an invented table: numbers drawn around a centre of each class, some labels changed.
type recipe struct {
	rows, numbers, classes int
	apart                  float64 // class centres are drawn with half of this as standard deviation; rows about them with 1
	wrong                  float64 // share of labels changed to another class, evenly
	category               bool    // one more column, whose level follows the true class in 2 of 3 rows
	missing                float64 // share of values left out
	sources                int     // the first of them makes three times as many errors
	first                  int64   // number of the first row
	seed                   uint64
}

// table draws the rows; truth holds the right class of each. Row i of a recipe is the same whatever first and rows are.
func (r recipe) table() (t *Table, truth []int32) {
	t = &Table{}
	for c := range r.classes {
		t.Classes = append(t.Classes, fmt.Sprintf("grade %c", 'A'+c))
	}
	for j := range r.numbers {
		t.Columns = append(t.Columns, Column{Name: fmt.Sprintf("n%02d", j), Kind: Number, Size: 1})
	}
	if r.category {
		t.Columns = append(t.Columns, Column{Name: "cultivar", Kind: Category, Size: 1, Levels: []string{"Topaz", "Elstar", "Rubinette", "Gala"}})
	}
	for s := range r.sources {
		t.SourceNames = append(t.SourceNames, fmt.Sprintf("line %d", s+1))
	}
	at := r.centres()
	for i := range r.rows {
		row := r.first + int64(i)
		truth = append(truth, r.row(t, row, at, rand.New(rand.NewPCG(r.seed, 2+uint64(row)))))
		t.Keys = append(t.Keys, Key(row))
	}
	return t, truth
}

// centres are the means of the numbers by class.
func (r recipe) centres() [][]float64 {
	rng := rand.New(rand.NewPCG(r.seed, 1))
	at := make([][]float64, r.classes)
	for c := range at {
		at[c] = make([]float64, r.numbers)
		for j := range at[c] {
			at[c][j] = rng.NormFloat64() * r.apart / 2
		}
	}
	return at
}

// oracle is the probability of a wrong label given the densities and the rate that the rows were drawn with, which no
// method can better. Numbers only, none missing, no sources.
func (r recipe) oracle(t *Table) []Score {
	at, out := r.centres(), make([]Score, t.Rows())
	for i, o := range t.Labels {
		right, all := 0.0, 0.0
		for c := range at {
			d := 0.0
			for j := range at[c] {
				v := t.Columns[j].Values[i] - at[c][j]
				d += v * v
			}
			p := math.Exp(-d/2) * r.wrong / float64(r.classes-1)
			if int32(c) == o {
				p = math.Exp(-d/2) * (1 - r.wrong)
				right = p
			}
			all += p
		}
		out[i].P = 1 - right/all
	}
	return out
}

// row adds one row to t and returns its right class.
func (r recipe) row(t *Table, row int64, at [][]float64, rng *rand.Rand) int32 {
	c := rng.IntN(r.classes)
	for j := range r.numbers {
		v := at[c][j] + rng.NormFloat64()
		if rng.Float64() < r.missing {
			v = nan
		}
		t.Columns[j].Values = append(t.Columns[j].Values, v)
	}
	if r.category {
		level := int32(c % 4)
		if rng.IntN(3) == 0 {
			level = int32(rng.IntN(4))
		}
		if rng.Float64() < r.missing {
			level = -1
		}
		last := &t.Columns[r.numbers]
		last.Codes = append(last.Codes, level)
	}
	wrong := r.wrong
	if r.sources > 0 {
		s := rng.IntN(r.sources)
		t.Sources = append(t.Sources, int32(s))
		if s == 0 {
			wrong *= 3
		}
	}
	label := c
	if rng.Float64() < wrong {
		label = (c + 1 + rng.IntN(r.classes-1)) % r.classes
	}
	t.Labels = append(t.Labels, int32(label))
	return int32(c)
}
