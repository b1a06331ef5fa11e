package model

import (
	"context"
	"fmt"
	"math"
	"os"
	"strings"

	"labelweir/model/internal/chain"
	"labelweir/model/internal/learn"
	"labelweir/model/internal/noise"
)

// Options of a Trainer.
type Options struct {
	Folds     int     // parts of the window; a row is judged by the model that did not see its part; default 5
	Seed      uint64  // of every random draw; default 1
	Precision float64 // share of truly wrong labels wanted among held-back rows, in (0.5, 1); default 0.95
	Workers   int     // goroutines; the result does not depend on it; default the number of cores

	// Progress, if set, is told what is being done now: a phase's name and how far it is. It is called from one
	// goroutine at a time.
	Progress func(phase string, done, total int)
}

// MinRows is the fewest labelled rows a Trainer accepts, and MinClassRows the fewest rows of a class for it to be
// learned; rows of smaller classes are left out of training and scored NewClass.
const (
	MinRows      = 50
	MinClassRows = 5
)

// DefaultOptions gives the defaults named in Options.
func DefaultOptions() Options { return Options{Folds: 5, Seed: 1, Precision: 0.95, Workers: 2} }

// Result is what one training gives.
type Result struct {
	Snapshot *Snapshot
	Scores   []Score // one a row of the table, each by a model that did not see the row's own label
}

// Trainer fits snapshots to a window and keeps what the next fit can start from. It belongs to one goroutine.
type Trainer struct {
	opt Options
}

// NewTrainer returns a trainer without a past.
func NewTrainer(o Options) *Trainer { return &Trainer{opt: o} }

// Fit trains on t, which it neither keeps nor changes. The first call searches encoder, λ and q (cold); later ones
// start from the last result (warm). Errors: ErrTable, ErrTooFew, ErrOneClass, or the context's.
func (tr *Trainer) Fit(ctx context.Context, t *Table) (*Result, error) {
	in, err := newIntake(t)
	if err != nil {
		return nil, err
	}
	nd := len(learn.Designs())
	folds := tr.opt.Folds
	if len(in.rows) < smallRows {
		folds *= 2
	}
	in.smooth(tr.opt.Seed)
	in.deal(t, folds)
	n, k := len(in.rows), in.data.Classes
	out := &heldOut{linear: make([][]float64, nd*3*len(gridQ))}
	for i := range out.votes {
		out.votes[i] = make([]float64, n*k)
	}
	for i := range out.linear {
		out.linear[i] = make([]float64, n*k)
	}
	var settings []learn.Linear
	err = each(ctx, folds, tr.opt.Workers, func(i int, s *chain.Scratch) error {
		sc := in.trainFold(i, nd, tr.opt.Seed, s)
		in.score(sc, i, out)
		if i == 0 {
			settings = sc.Linear
		}
		return nil
	})
	if err != nil {
		return nil, err
	}
	var members [][]float64
	var names []string
	use := os.Getenv("LW_MEMBERS")
	if use == "" {
		use = "raw,cleaned,d0,d1,d2,d3,d4"
	}
	for _, u := range strings.Split(use, ",") {
		switch u {
		case "raw":
			members, names = append(members, out.votes[0]), append(names, u)
		case "cleaned":
			members, names = append(members, out.votes[1]), append(names, u)
		default:
			d := int(u[1] - '0')
			best, at := math.Inf(-1), -1
			for i := range settings {
				if settings[i].Design == d {
					if _, e := noise.Quick(in.noiseData(out.linear[i])); e > best {
						best, at = e, i
					}
				}
			}
			members, names = append(members, out.linear[at]), append(names, fmt.Sprintf("%s λ=%g q=%g", learn.Designs()[d].Name, settings[at].Lambda, settings[at].Q))
		}
	}
	data := in.noiseData(members...)
	layer, facts := noise.Fit(data)
	if os.Getenv("LW_DEBUG") != "" {
		for i, m := range names {
			fmt.Fprintf(os.Stderr, "  %-28s %.3f\n", m, layer.Models[0].P.A[i])
		}
		for i := range facts.Names {
			fmt.Fprintf(os.Stderr, "  model %-28s %.2f %v\n", facts.Names[i], facts.Evidence[i], facts.Refused[i])
		}
	}
	res := &Result{Snapshot: &Snapshot{}, Scores: make([]Score, t.Rows())}
	for i := range res.Scores {
		res.Scores[i] = Score{P: math.NaN(), Margin: math.NaN(), Implied: -1, Reason: in.reason[i]}
	}
	j := layer.NewJudge()
	for i, r := range in.rows {
		src := -1
		if in.data.Source != nil {
			src = int(in.data.Source[i])
		}
		v := j.Row(members, i, int(in.data.Labels[i]), src)
		res.Scores[r] = Score{P: v.Wrong, Margin: v.Margin, Implied: int32(v.Implied)}
	}
	f := &res.Snapshot.facts
	f.Rows, f.Classes, f.ClassRows, f.Sources = n, in.classes, in.counts, in.sources
	f.Threshold = 0.95
	f.Noise.Share = Estimate{facts.Share.Value, facts.Share.Low, facts.Share.High, n}
	for i := range k {
		f.Noise.Flip = append(f.Noise.Flip, nil)
		for c := range k {
			x := facts.Flip[i*k+c]
			f.Noise.Flip[i] = append(f.Noise.Flip[i], Estimate{x.Value, x.Low, x.High, in.counts[i]})
		}
	}
	return res, nil
}
