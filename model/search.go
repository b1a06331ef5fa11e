package model

import (
	"context"
	"math/rand/v2"

	"labelweir/model/internal/chain"
	"labelweir/model/internal/learn"
	"labelweir/model/internal/noise"
)

// cold searches the plan: λ on the first folds, q on all, and leaves out members without weight.
func (f *fitting) cold(ctx context.Context) (*noise.Layer, *noise.Facts, error) {
	if err := f.grow(ctx, 0); err != nil {
		return nil, nil, err
	}
	learn.ChoosePairs(f.data, f.votes[learn.Raw])
	learn.ChooseLeaves(f.data, f.leaves())
	held := f.folds[:len(f.folds)-1]
	trial := held[:f.trials(len(held))]
	none := chain.PortfolioOptions{}
	rows := f.narrow(len(trial))
	err := f.each(ctx, "search", 1, trial, func(fold *learn.Fold, rng *rand.Rand, s *chain.Scratch) {
		for i := range learn.Designs {
			for _, lambda := range learn.Designs[i].Lambdas {
				f.solve(fold, i, lambda, learn.Qs[:], none, rng, s)
			}
		}
		fold.Solved()
	})
	if err != nil {
		return nil, nil, err
	}
	first := f.choose(f.scores, rows)
	f.keep(settings(first, learn.Qs[:]))
	f.widen(rows)
	err = f.each(ctx, "chains", 2, held[len(trial):], func(fold *learn.Fold, rng *rand.Rand, s *chain.Scratch) {
		for _, set := range first {
			f.solve(fold, set.Design, set.Lambda, learn.Qs[:], none, rng, s)
		}
		fold.Solved()
	})
	if err != nil {
		return nil, nil, err
	}
	f.plan = []member{{forest: learn.Raw}, {forest: learn.Cleaned}}
	for _, set := range f.choose(f.scores, nil) {
		f.plan = append(f.plan, member{forest: -1, setting: set})
	}
	f.progress("noise", 0, 1)
	data := f.subset(nil, f.members()...)
	layer, facts := noise.Fit(data)
	if f.leaveOut(layer, data) {
		layer, facts = noise.Refit(f.subset(nil, f.members()...), layer)
	}
	f.keep(f.linears())
	f.progress("noise", 1, 1)
	return layer, facts, f.whole(ctx)
}

// keep frees what the search left of settings other than the listed ones.
func (f *fitting) keep(used []learn.Setting) {
	scores := map[learn.Setting][]float64{}
	for _, set := range used {
		scores[set] = f.scores[set]
	}
	f.scores = scores
	for _, fold := range f.folds {
		fold.Forget(used)
	}
}

// settings are those listed, each at every q.
func settings(list []learn.Setting, qs []float64) []learn.Setting {
	var out []learn.Setting
	for _, set := range list {
		for _, q := range qs {
			set.Q = q
			out = append(out, set)
		}
	}
	return out
}

// leaves is the most leaves that a fold's forest for linear scorers has.
func (f *fitting) leaves() int {
	most := 0
	for _, fold := range f.folds {
		most = max(most, fold.Forest[learn.Cleaned].Leaves())
	}
	return most
}

// trials is the number of folds, of so many, on which λ is searched: enough for trialRows held-out rows, at most two in
// five.
func (f *fitting) trials(folds int) int {
	most := (2*folds + 4) / 5
	for n := 1; n < most; n++ {
		if n*len(f.rows)/folds >= trialRows {
			return n
		}
	}
	return most
}

const trialRows = 1200

// leaveOut drops members that do not move the logits, and the vote on observed labels already when it moves them little:
// no other member needs that forest to be walked for each fresh row. It tells whether the others should be fitted anew.
func (f *fitting) leaveOut(l *noise.Layer, d *noise.Data) (anew bool) {
	var at []int
	var plan []member
	for i, m := range f.plan {
		spread, least := l.Spread(d, i), fewest
		if m.forest == learn.Raw {
			least = fewestForWalk
		}
		if spread >= least {
			at, plan = append(at, i), append(plan, m)
		} else if spread >= fewest {
			anew = true
		}
	}
	if len(at) == 0 {
		return false
	}
	l.Keep(at)
	f.plan = plan
	return anew
}

// roughRows is up to how many rows the objective is rough enough for the escapes from its local minima to find better
// ones; on 8,000 rows they gained less than 0.01 % of J.
const roughRows = 4000

// whole fits the plan on all rows, for fresh ones.
func (f *fitting) whole(ctx context.Context) error {
	return f.each(ctx, "whole", 3, f.folds[len(f.folds)-1:], func(fold *learn.Fold, rng *rand.Rand, s *chain.Scratch) {
		for _, m := range f.plan {
			if m.forest < 0 {
				var o chain.PortfolioOptions
				if f.data.Rows() <= roughRows {
					o.Hops, o.Hysteresis = 2, 1e-3
					if learn.Designs[m.setting.Design].Leaf == 0 {
						// Annealing visits every weight bit, and leaves have too many.
						o.Anneals, o.Anneal = 1, chain.DefaultAnneal()
					}
				}
				f.solve(fold, m.setting.Design, m.setting.Lambda, []float64{m.setting.Q}, o, rng, s)
			}
		}
	})
}
