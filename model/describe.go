package model

import (
	"fmt"

	"labelweir/model/internal/learn"
	"labelweir/model/internal/noise"
)

// facts puts into words and shares what a training found.
func (f *fitting) facts(layer *noise.Layer, found *noise.Facts, warm bool) Facts {
	k := len(f.classes)
	out := Facts{Rows: len(f.rows), Classes: f.classes, ClassRows: f.counts, Sources: f.sources, Warm: warm}
	out.Choice = f.choice(layer)
	var tallies []learn.Tally
	for _, fold := range f.folds {
		tallies = learn.AddTally(tallies, f.tallies[fold.Number])
	}
	for _, t := range tallies {
		out.Chains = append(out.Chains, Chain{Name: t.Name, Tried: t.Tried, Won: t.Won, MeanGap: t.Gap / float64(max(1, t.Tried))})
	}
	n := &out.Noise
	n.Share = estimate(found.Share, len(f.rows))
	n.Model = layer.Models[0].Name
	for c := range k {
		n.ByClass = append(n.ByClass, estimate(found.ByClass[c], f.counts[c]))
		row := make([]Estimate, k)
		for j := range row {
			row[j] = estimate(found.Flip[c*k+j], f.counts[c])
		}
		n.Flip = append(n.Flip, row)
	}
	rows := make([]int, len(f.sources))
	for _, s := range f.data.Source {
		if s >= 0 {
			rows[s]++
		}
	}
	for s := range f.sources {
		n.BySource = append(n.BySource, estimate(found.BySource[s], rows[s]))
	}
	for _, c := range found.Unclear {
		n.Unclear = append(n.Unclear, f.classes[c])
	}
	return out
}

func estimate(x noise.Interval, rows int) Estimate {
	return Estimate{Value: x.Value, Low: x.Low, High: x.High, Rows: rows}
}

// choice names the linear scorer with the largest weight, and all members.
func (f *fitting) choice(layer *noise.Layer) Choice {
	c := Choice{Encoder: "forest votes"}
	best := 0.0
	for i, m := range f.plan {
		w := layer.Weight(i)
		c.Members = append(c.Members, Member{Name: m.String(), Weight: w})
		if m.forest < 0 && w > best {
			best = w
			c.Encoder, c.Q, c.Lambda = learn.Designs[m.setting.Design].Name, m.setting.Q, m.setting.Lambda
		}
	}
	c.Why = fmt.Sprintf("highest likelihood of the observed labels out of fold among %d settings; %d of %d members carry weight",
		len(learn.Designs)*len(learn.Designs[0].Lambdas)*len(learn.Qs), len(f.plan), learn.Forests+len(learn.Designs))
	return c
}
