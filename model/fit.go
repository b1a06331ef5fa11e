package model

import (
	"context"
	"math/rand/v2"
	"sync"

	"labelweir/model/internal/chain"
	"labelweir/model/internal/learn"
	"labelweir/model/internal/noise"
)

// fitting is one training under way.
type fitting struct {
	*intake
	opt   Options
	folds []*learn.Fold // the last one holds nothing out: it judges fresh rows
	plan  []member

	mu      sync.Mutex // guards scores, linear and done while folds run in parallel
	votes   [learn.Forests][]float64
	scores  map[learn.Setting][]float64 // out of fold, by setting
	linear  map[learn.Setting]learn.Linear
	tallies map[int][]learn.Tally // by fold number, so that sums do not depend on which fold is done first
	done    int
}

// newFitting deals the rows into folds; last, if any, is the training this one continues.
func newFitting(in *intake, o Options, last *fitting) *fitting {
	f := &fitting{intake: in, opt: o, scores: map[learn.Setting][]float64{}, linear: map[learn.Setting]learn.Linear{}, tallies: map[int][]learn.Tally{}}
	for i := range f.votes {
		f.votes[i] = make([]float64, in.data.Rows()*in.data.Classes)
	}
	if last != nil {
		f.folds, f.plan = last.folds, last.plan
		return f
	}
	n := o.Folds
	if len(in.rows) < smallRows {
		n *= 2
	}
	for i := range n {
		f.folds = append(f.folds, &learn.Fold{Number: i})
	}
	f.folds = append(f.folds, &learn.Fold{Number: wholeFold})
	return f
}

// wholeFold is the number of the fold that holds nothing out.
const wholeFold = 255

// each runs work on the listed folds in parallel and waits. Every fold has its own stream of random numbers.
func (f *fitting) each(ctx context.Context, phase string, stage uint64, folds []*learn.Fold, work func(*learn.Fold, *rand.Rand, *chain.Scratch)) error {
	next := make(chan *learn.Fold) // unbuffered: a worker takes what it can do now
	var wg sync.WaitGroup
	f.done = 0
	f.progress(phase, 0, len(folds))
	for range max(1, min(f.opt.Workers, len(folds))) {
		wg.Go(func() {
			var s chain.Scratch
			for fold := range next {
				if ctx.Err() == nil {
					work(fold, rand.New(rand.NewPCG(f.opt.Seed, stage<<8|uint64(fold.Number))), &s)
				}
				f.mu.Lock()
				f.done++
				f.progress(phase, f.done, len(folds))
				f.mu.Unlock()
			}
		})
	}
	for _, fold := range folds {
		next <- fold
	}
	close(next)
	wg.Wait()
	return ctx.Err()
}

func (f *fitting) progress(phase string, done, total int) {
	if f.opt.Progress != nil {
		f.opt.Progress(phase, done, total)
	}
}

// grow brings the forests of all folds up to date and votes on the held-out rows.
func (f *fitting) grow(ctx context.Context, stage uint64) error {
	return f.each(ctx, "trees", stage, f.folds, func(fold *learn.Fold, rng *rand.Rand, _ *chain.Scratch) {
		fold.Grow(f.data, f.fold, rng)
		k := f.data.Classes
		for i, at := range f.fold {
			if int(at) == fold.Number {
				for v := range f.votes {
					fold.Vote(v, i, f.votes[v][i*k:(i+1)*k])
				}
			}
		}
	})
}

// solve fits the settings of one design and λ in a fold: scorers for fresh rows in the fold that holds nothing out, in
// the others scores of the rows they hold out.
func (f *fitting) solve(fold *learn.Fold, design int, lambda float64, qs []float64, o chain.PortfolioOptions, rng *rand.Rand, s *chain.Scratch) {
	linear := make([]learn.Linear, len(qs))
	for j, q := range qs {
		linear[j].Setting = learn.Setting{Design: design, Lambda: lambda, Q: q}
	}
	take := func(j int, p learn.Pair) { linear[j].Pairs = append(linear[j].Pairs, p) }
	var h *heldOut
	if fold.Number != wholeFold {
		h = f.holdOut(fold, linear)
		take = h.add
	}
	tally := fold.Solve(f.data, design, lambda, qs, o, rng, s, take)
	if h != nil {
		h.finish()
	}
	f.mu.Lock()
	defer f.mu.Unlock()
	f.tallies[fold.Number] = learn.AddTally(f.tallies[fold.Number], tally)
	for _, l := range linear {
		if len(l.Pairs) > 0 {
			f.linear[l.Setting] = l
		}
	}
}

// linears are the settings of the plan's linear scorers.
func (f *fitting) linears() []learn.Setting {
	var out []learn.Setting
	for _, m := range f.plan {
		if m.forest < 0 {
			out = append(out, m.setting)
		}
	}
	return out
}

// members are the out-of-fold class scores of the plan.
func (f *fitting) members() [][]float64 {
	out := make([][]float64, len(f.plan))
	for i, m := range f.plan {
		if m.forest >= 0 {
			out[i] = f.votes[m.forest]
		} else {
			out[i] = f.scores[m.setting]
		}
	}
	return out
}

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
	err := f.each(ctx, "search", 1, trial, func(fold *learn.Fold, rng *rand.Rand, s *chain.Scratch) {
		for i := range learn.Designs {
			for _, lambda := range learn.Designs[i].Lambdas {
				f.solve(fold, i, lambda, learn.Qs[:], none, rng, s)
			}
		}
	})
	if err != nil {
		return nil, nil, err
	}
	var rows []int32
	for i, at := range f.fold {
		if int(at) < len(trial) {
			rows = append(rows, int32(i))
		}
	}
	first := f.choose(f.scores, rows)
	f.keep(settings(first, learn.Qs[:]))
	err = f.each(ctx, "chains", 2, held[len(trial):], func(fold *learn.Fold, rng *rand.Rand, s *chain.Scratch) {
		for _, set := range first {
			f.solve(fold, set.Design, set.Lambda, learn.Qs[:], none, rng, s)
		}
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

// swiftRows is from how many rows on two epochs bring the weights close enough to their optimum for the flags to be renewed.
const swiftRows = 8000

// warm refits the plan of the last training.
func (f *fitting) warm(ctx context.Context, stage uint64, last *noise.Layer) (*noise.Layer, *noise.Facts, error) {
	if err := f.grow(ctx, stage<<2); err != nil {
		return nil, nil, err
	}
	o := chain.PortfolioOptions{WarmEpochs: 5, Hysteresis: 1e-3}
	if f.data.Rows() >= swiftRows {
		o.WarmEpochs = 3
	}
	err := f.each(ctx, "chains", stage<<2|1, f.folds, func(fold *learn.Fold, rng *rand.Rand, s *chain.Scratch) {
		for _, m := range f.plan {
			if m.forest < 0 {
				o := o
				if fold.Number == wholeFold && f.data.Rows() <= smallRows {
					o.Hops = 2
				}
				f.solve(fold, m.setting.Design, m.setting.Lambda, []float64{m.setting.Q}, o, rng, s)
			}
		}
	})
	if err != nil {
		return nil, nil, err
	}
	f.progress("noise", 0, 1)
	layer, facts := noise.Refit(f.subset(nil, f.members()...), last)
	f.progress("noise", 1, 1)
	return layer, facts, nil
}
