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
	sideBySide(len(jobs), procs, progress, func(i int) string {
		out[i] = judgeCell(ctx, jobs[i], fit)
		return out[i].line()
	})
	return out
}

// runStreams goes through the streams that the settings ask for.
func runStreams(ctx context.Context, s settings, progress io.Writer) ([]streamFigures, error) {
	names := s.tables
	if len(names) == 0 {
		var err error
		if names, err = panel.StreamNames(s.dir); err != nil {
			return nil, err
		}
	}
	streams := make([]*panel.Stream, len(names))
	for i, name := range names {
		var err error
		if streams[i], err = panel.OpenStream(s.dir, name); err != nil {
			return nil, err
		}
	}
	out := make([]streamFigures, len(streams))
	sideBySide(len(streams), s.procs, progress, func(i int) string {
		out[i] = judgeStream(ctx, streams[i], s.sliding)
		return out[i].line()
	})
	return out, nil
}

// sideBySide does work for 0 ≤ i < n on procs goroutines, and writes the line that each gives.
func sideBySide(n, procs int, progress io.Writer, work func(i int) string) {
	next := make(chan int) // no capacity: a worker takes a job when it is free
	var wg sync.WaitGroup
	var mu sync.Mutex // guards done and progress
	done := 0
	for range min(procs, n) {
		wg.Go(func() {
			for i := range next {
				line := work(i)
				mu.Lock()
				done++
				fmt.Fprintf(progress, "%d/%d %s\n", done, n, line)
				mu.Unlock()
			}
		})
	}
	for i := range n {
		next <- i
	}
	close(next)
	wg.Wait()
}
