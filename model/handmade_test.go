package model

import (
	"labelweir/model/internal/encode"
	"labelweir/model/internal/fresh"
	"labelweir/model/internal/noise"
)

// handmade is a small snapshot with something in every part of the saved form. Two columns, three classes.
func handmade(t interface{ Fatal(...any) }) *Snapshot {
	s := &Snapshot{facts: handmadeFacts(), machine: handmadeMachine(), layer: handmadeLayer()}
	s.fields = []field{{Name: "weight_g", Kind: Number, Size: 1}, {Name: "cultivar", Kind: Category}, {Name: "colour", Kind: Vector, Size: 2}}
	s.encoder = &encode.Encoder{Parts: []encode.Part{
		{Numbers: []encode.Number{{Knots: []float64{90, 140, 210}, Normal: []float64{-1.5, 0, 1.25}, Edges: []float64{115, 175}, Filler: 140, Missing: true}}},
		{Levels: []string{"Topaz", "Elstar"}},
		{Numbers: []encode.Number{{Knots: []float64{0.5}, Normal: []float64{0}, Filler: 0.5}, {Missing: true}}},
	}}
	if err := s.complete(); err != nil {
		t.Fatal(err)
	}
	s.seal()
	return s
}

func handmadeFacts() Facts {
	e := Estimate{Value: 0.1, Low: 0.05, High: 0.2, Rows: 7}
	row := []Estimate{e, e, e}
	return Facts{Rows: 21, Classes: []string{"cull", "extra", "first"}, ClassRows: []int{6, 7, 8}, Sources: []string{"line 1", "line 2"},
		Choice:    Choice{Encoder: "numbers", Q: -0.5, Lambda: 0.01, Why: "handmade", Members: []Member{{Name: "vote", Weight: 0.5}, {Name: "numbers", Weight: 1.5}}},
		Chains:    []Chain{{Name: "warm", Tried: 3, Won: 2, MeanGap: 0.25}},
		Noise:     Noise{Share: e, ByClass: row, BySource: row[:2], Flip: [][]Estimate{row, row, row}, Model: "single", Unclear: []string{"cull"}},
		Threshold: 0.875, Warm: true}
}

// handmadeMachine has nine numbers a row: weight and its absence, four slots of cultivar, two of colour and an absence.
func handmadeMachine() *fresh.Machine {
	trees := fresh.Forest{Low: []float64{0, 0, 0, -0.25, 0.125}, Step: []float64{1. / 65535, 1. / 65535, 1. / 65535, 1e-5, 0}, Nodes: []fresh.Node{
		{Feature: 0, Cut: 1, Split: true}, {}, {Feature: 2, Cut: 0, Split: true}, {}, {},
		{},
	}}
	for leaf := range uint64(4) {
		trees.Values = append(trees.Values, 0x1111222233334444*leaf, leaf)
	}
	k := fresh.Kernel{Gamma: 0.75, Dim: 9}
	for i := range 2 * k.Dim {
		k.Landmarks = append(k.Landmarks, float32(i%5)/4-0.5)
	}
	ab := []fresh.Pair{{A: 0, B: 1, Bias: 0.5}, {A: 2, B: 1, Bias: -0.25}}
	numbers := fresh.Member{Forest: 0, At: 3, Kernel: -1, Linear: true, Pairs: ab, Clip: 3, Scale: 0.5}
	for i := range 2 * k.Dim {
		numbers.Weight = append(numbers.Weight, float32(i)/8-1)
	}
	smooth := fresh.Member{Forest: -1, Kernel: 0, Linear: true, Pairs: ab[:1], Clip: 3, Scale: 0.5, Smooth: []float32{2, -1}}
	return &fresh.Machine{Forests: []fresh.Forest{trees}, Kernels: []fresh.Kernel{k},
		Members: []fresh.Member{{Forest: 0, Kernel: -1}, numbers, smooth}}
}

func handmadeLayer() *noise.Layer {
	flip := []float64{0.9, 0.05, 0.05, 0.1, 0.8, 0.1, 0, 0.25, 0.75}
	return &noise.Layer{Classes: 3, Models: []noise.Model{
		{Name: "free+boundary+source", Weight: 0.75, P: noise.Params{A: []float64{1, 0.5, 0.25}, B: []float64{0.1, -0.1, 0}, Flip: flip,
			Slopes: []noise.Slope{{C: 0, D: 2, Mu: 0.25}}, Gamma: 0.3, Tau: 1.5, Rho: []float64{0.5, 2}}},
		{Name: "single", Weight: 0.25, P: noise.Params{A: []float64{1, 0, 2}, B: []float64{0, 0, 0}, Flip: flip, Tau: 1.5}},
	}, Steps: []noise.Step{{At: -2, Share: 0.01}, {At: 0.5, Share: 0.25}}}
}

// handmadeTable has rows for handmade: every kind of value, a class, a level and a source it does not know.
func handmadeTable() *Table {
	t := &Table{Classes: []string{"first", "extra", "juice", "cull"}, SourceNames: []string{"line 3", "line 2", "line 1"},
		Columns: []Column{
			{Name: "colour", Kind: Vector, Size: 2}, {Name: "unused", Kind: Number, Size: 1},
			{Name: "cultivar", Kind: Category, Levels: []string{"Elstar", "Gala", "Topaz"}}, {Name: "weight_g", Kind: Number, Size: 1},
		}}
	for i := range 60 {
		t.Labels = append(t.Labels, int32(i%5)-1)
		t.Sources = append(t.Sources, int32(i%4)-1)
		t.Keys = append(t.Keys, Key(int64(i)))
		t.Columns[0].Values = append(t.Columns[0].Values, float64(i%3)/2, 1)
		t.Columns[1].Values = append(t.Columns[1].Values, nan)
		t.Columns[2].Codes = append(t.Columns[2].Codes, int32(i/2%4)-1)
		v := 80 + 3*float64(i)
		if i%7 == 0 {
			v = nan
		}
		t.Columns[3].Values = append(t.Columns[3].Values, v)
	}
	return t
}
