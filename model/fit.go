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
	place   []int32                     // of each row in scores while few of them have any; nil: its own number
	placed  int                         // rows with a place
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
		f.folds = append(f.folds, &learn.Fold{Number: i, Once: o.Once})
	}
	f.folds = append(f.folds, &learn.Fold{Number: wholeFold, Once: o.Once})
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
		fold.Voted(fold.Number == wholeFold)
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

// swiftRows is from how many rows on two epochs bring the weights close enough to their optimum for the flags to be renewed.
const swiftRows = 8000

// warm refits the plan of the last training.
func (f *fitting) warm(ctx context.Context, stage uint64, last *noise.Layer) (*noise.Layer, *noise.Facts, error) {
	if f.walks() {
		if err := f.grow(ctx, stage<<2); err != nil {
			return nil, nil, err
		}
	} else {
		for _, fold := range f.folds {
			fold.Rest(f.fold)
		}
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
