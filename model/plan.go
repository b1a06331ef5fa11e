package model

import (
	"fmt"
	"math"
	"slices"

	"labelweir/model/internal/learn"
	"labelweir/model/internal/noise"
)

// member is one scorer of the weighted sum.
type member struct {
	forest  int           // ≥ 0: the vote of that forest; −1: a linear scorer
	setting learn.Setting // of a linear scorer
}

// String names the member for people.
func (m member) String() string {
	switch m.forest {
	case learn.Raw:
		return "vote of trees on observed labels"
	case learn.Cleaned:
		return "vote of trees on cleaned labels"
	}
	return fmt.Sprintf("bounded loss on %s, λ=%g, q=%g", learn.Designs[m.setting.Design].Name, m.setting.Lambda, m.setting.Q)
}

// walks tells whether the plan needs forests: their votes, or their leaves as features.
func (f *fitting) walks() bool {
	return slices.ContainsFunc(f.plan, func(m member) bool {
		return m.forest >= 0 || learn.Designs[m.setting.Design].Leaf > 0
	})
}

// fewest is the spread in logits below which a member is left out.
const fewest = 0.02

// fewestForWalk is the same of a member for whose sake alone a forest would be walked.
const fewestForWalk = 0.1

// preferLambda is the evidence in nats that each step to a larger λ is given beforehand: of settings that do alike on the
// rows at hand, the more restrained one does better on others.
const preferLambda = 3

// choose picks for each design the setting with the highest evidence out of fold. scores holds, by setting, the class
// scores of the trial rows (nil: of all).
func (in *intake) choose(scores map[learn.Setting][]float64, trial []int32) []learn.Setting {
	var out []learn.Setting
	rows := in.subset(trial)
	for i := range learn.Designs {
		best, at := math.Inf(-1), -1
		var all []learn.Setting
		for step, lambda := range learn.Designs[i].Lambdas {
			for _, q := range learn.Qs {
				s := learn.Setting{Design: i, Lambda: lambda, Q: q}
				if scores[s] == nil {
					continue
				}
				all = append(all, s)
				d := *rows
				d.Members = [][]float64{scores[s]}
				_, e := noise.Quick(&d)
				if e += float64(step) * preferLambda; e > best {
					best, at = e, len(all)-1
				}
			}
		}
		if at >= 0 {
			out = append(out, all[at])
		}
	}
	return out
}

// subset is the noise layer's view of the listed rows (nil: all) with the given members.
func (in *intake) subset(rows []int32, members ...[]float64) *noise.Data {
	d := in.data
	if rows == nil {
		return &noise.Data{Classes: d.Classes, Members: members, Observed: d.Labels, Source: d.Source, Sources: d.Sources, Workers: d.Workers}
	}
	k := d.Classes
	out := &noise.Data{Classes: k, Sources: d.Sources, Observed: make([]int32, len(rows)), Members: make([][]float64, len(members))}
	if d.Source != nil {
		out.Source = make([]int32, len(rows))
	}
	for m := range members {
		out.Members[m] = make([]float64, len(rows)*k)
	}
	for i, r := range rows {
		out.Observed[i] = d.Labels[r]
		if d.Source != nil {
			out.Source[i] = d.Source[r]
		}
		for m := range members {
			copy(out.Members[m][i*k:(i+1)*k], members[m][int(r)*k:int(r+1)*k])
		}
	}
	return out
}
