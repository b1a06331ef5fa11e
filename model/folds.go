package model

import (
	"context"
	"math/rand/v2"
	"sync"

	"labelweir/model/internal/chain"
	"labelweir/model/internal/learn"
	"labelweir/model/internal/noise"
)

// The grid that a cold search covers.
var (
	gridQ = [...]float64{-1, -0.5, 0}
)

// heldOut holds, for one scorer, the class scores of the rows it did not see.
type heldOut struct {
	votes  [2][]float64 // raw, cleaned: N·k
	linear [][]float64  // by setting: N·k
}

// each runs work(i) for 0 ≤ i < n on so many goroutines and waits for them; the first error by index is returned.
func each(ctx context.Context, n, workers int, work func(i int, s *chain.Scratch) error) error {
	next := make(chan int) // unbuffered: a worker takes what it can do now
	errs := make([]error, n)
	var wg sync.WaitGroup
	for range max(1, min(workers, n)) {
		wg.Go(func() {
			var s chain.Scratch
			for i := range next {
				if errs[i] = ctx.Err(); errs[i] == nil {
					errs[i] = work(i, &s)
				}
			}
		})
	}
	for i := range n {
		next <- i
	}
	close(next)
	wg.Wait()
	for _, err := range errs {
		if err != nil {
			return err
		}
	}
	return nil
}

// trainFold trains the scorer of one fold on all rows of other folds (fold = folds: on all rows).
func (in *intake) trainFold(fold, designs int, seed uint64, s *chain.Scratch) *learn.Scorer {
	rng := rand.New(rand.NewPCG(seed, uint64(fold)))
	var rows []int32
	for i, f := range in.fold {
		if int(f) != fold {
			rows = append(rows, int32(i))
		}
	}
	g := learn.Grow(in.data, rows, rng)
	which := make([]int, designs)
	for i := range which {
		which[i] = i
	}
	return learn.Train(in.data, g, which, gridQ[:], rng, s)
}

// score writes the class scores of a fold's held-out rows.
func (in *intake) score(sc *learn.Scorer, fold int, out *heldOut) {
	k, d, b := in.data.Classes, in.data.Dense, in.data.Bins.D
	r := sc.NewRow(d, b)
	for i, f := range in.fold {
		if int(f) != fold {
			continue
		}
		r.Dense = in.data.X[i*d : (i+1)*d]
		r.Bins = in.data.Bins.Rows[i*b : (i+1)*b]
		for j, x := range in.data.Smooth {
			if x != nil {
				m := in.data.Kernels[j].Size() + 1
				r.Smooth[j] = x[i*m : (i+1)*m]
			}
		}
		sc.Walk(r)
		for v := range out.votes {
			sc.Vote(v, r, out.votes[v][i*k:(i+1)*k])
		}
		for l := range out.linear {
			sc.Decide(l, r, out.linear[l][i*k:(i+1)*k])
		}
	}
}

// noiseData is the noise layer's view of the rows with the given members.
func (in *intake) noiseData(members ...[]float64) *noise.Data {
	return &noise.Data{Classes: in.data.Classes, Members: members, Observed: in.data.Labels, Source: in.data.Source, Sources: in.data.Sources}
}
