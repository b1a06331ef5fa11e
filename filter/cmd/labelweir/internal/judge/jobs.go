package main

import (
	"context"
	"fmt"
	"io"
	"slices"
	"sync"

	"labelweir/filter/cmd/labelweir/internal/judge/panel"
)

// job is one cell to be run.
type job struct {
	table *panel.Table
	cell  panel.Cell
}

// plan lists the cells that the settings ask for, table by table, plan by plan, seed by seed.
func plan(s settings) ([]job, error) {
	names := s.tables
	if len(names) == 0 {
		var err error
		if names, err = panel.Names(s.dir); err != nil {
			return nil, err
		}
	}
	var jobs []job
	for _, name := range names {
		t, err := panel.Open(s.dir, name)
		if err != nil {
			return nil, err
		}
		plans := s.plans
		if len(plans) == 0 {
			plans = t.Plans()
		}
		for _, p := range plans {
			if !slices.Contains(t.Plans(), p) {
				return nil, fmt.Errorf("%s: no plan %q; there are %v", name, p, t.Plans())
			}
			for _, seed := range s.seeds {
				if c := (panel.Cell{Plan: p, Seed: seed}); t.Has(c) {
					jobs = append(jobs, job{t, c})
				}
			}
		}
	}
	if len(jobs) == 0 {
		return nil, fmt.Errorf("%s: no cell with seeds %v", s.dir, s.seeds)
	}
	return jobs, nil
}

// runAll runs the jobs on procs goroutines and gives their figures in the order of the jobs. Once ctx ends the
// remaining cells carry its error.
func runAll(ctx context.Context, jobs []job, procs int, fit fitter, progress io.Writer) []figures {
	out := make([]figures, len(jobs))
	next := make(chan int) // no capacity: a worker takes a job when it is free
	var wg sync.WaitGroup
	var mu sync.Mutex // guards done and progress
	done := 0
	for range min(procs, len(jobs)) {
		wg.Go(func() {
			for i := range next {
				out[i] = judgeCell(ctx, jobs[i], fit)
				mu.Lock()
				done++
				fmt.Fprintf(progress, "%d/%d %s\n", done, len(jobs), out[i].line())
				mu.Unlock()
			}
		})
	}
	for i := range jobs {
		next <- i
	}
	close(next)
	wg.Wait()
	return out
}
