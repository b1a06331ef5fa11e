package main

import (
	"bytes"
	"context"
	"io"
	"math"
	"path/filepath"
	"strings"
	"testing"

	"labelweir/filter/cmd/labelweir/internal/judge/panel"
	"labelweir/model"
)

const committed = "../../../../../testdata/panel"

func wineJobs(t *testing.T) []job {
	t.Helper()
	jobs, err := plan(settings{dir: committed, tables: []string{"wine"}, plans: []string{"clean", "uniform30"}, seeds: []int{0, 1}})
	if err != nil {
		t.Fatal(err)
	}
	return jobs
}

// knowing scores every row by the planted truth: p where it is wrong, 1−p where it is right.
func knowing(jobs []job, p float64) fitter {
	return func(_ context.Context, in *model.Table) ([]model.Score, *model.Facts, error) {
		for _, j := range jobs {
			c, err := j.table.Case(j.cell)
			if err != nil || &c.Input.Labels[0] != &in.Labels[0] {
				continue
			}
			scores := make([]model.Score, in.Rows())
			for i := range scores {
				scores[i].P = 1 - p
				if c.Wrong[i] {
					scores[i].P = p
				}
			}
			facts := &model.Facts{Classes: []string{"class_0", "class_1", "class_2"}, Threshold: 0.9}
			facts.Noise.Share = model.Estimate{Value: c.Share + 0.01, Low: c.Share - 0.02, High: c.Share + 0.02}
			for i := range 3 {
				facts.Noise.Flip = append(facts.Noise.Flip, make([]model.Estimate, 3))
				facts.Noise.Flip[i][i].Value = 1
			}
			return scores, facts, nil
		}
		panic("no such table")
	}
}

func TestKnowingScoresReachEveryFigure(t *testing.T) {
	jobs := wineJobs(t)
	cells := runAll(context.Background(), jobs, 2, knowing(jobs, 1), io.Discard)
	want := map[string]float64{"ap": 1, "ece": 0, "held_precision": 1, "held_recall": 1, "prec95": 1, "covers": 1, "share_error": 0.01, "unscored": 0}
	for i := range cells {
		f := &cells[i]
		if f.err != nil {
			t.Fatal(f.line())
		}
		for name, v := range want {
			if f.cell.Plan == "clean" && (name == "ap" || strings.HasSuffix(name, "precision") || name == "held_recall" || name == "prec95") {
				v = math.NaN()
			}
			if got := fieldNamed(name).value(f); math.Abs(got-v) > 1e-9 || math.IsNaN(got) != math.IsNaN(v) {
				t.Errorf("%s %d: %s = %v, want %v", f.cell.Plan, f.cell.Seed, name, got, v)
			}
		}
		if f.cell.Plan == "clean" && f.flipMax != 0 {
			t.Errorf("clean: flip rates off by %v, want 0", f.flipMax)
		}
		if f.cell.Plan == "uniform30" && (f.flipMax < 0.2 || f.flipMax > 0.5) {
			t.Errorf("uniform30: no flips estimated is off by %v, want about 0.3", f.flipMax)
		}
	}
}

func TestReportMarksAheadAndBehind(t *testing.T) {
	jobs := wineJobs(t)
	base, err := panel.ReadBaselines(filepath.Join(committed, "baselines.tsv"))
	if err != nil {
		t.Fatal(err)
	}
	for p, want := range map[float64]string{1: "ahead", 0.1: "behind"} {
		cells := runAll(context.Background(), jobs, 1, knowing(jobs, p), io.Discard)
		var out bytes.Buffer
		if err := report(&out, cells, base); err != nil {
			t.Fatal(err)
		}
		row := ""
		for line := range strings.Lines(out.String()) {
			if strings.HasPrefix(line, "wine") && strings.Contains(line, "uniform30") {
				row = line
			}
		}
		if !strings.Contains(row, " "+want+" ") {
			t.Errorf("scores of %v: %q, want %s", p, row, want)
		}
		if !strings.Contains(out.String(), "clean, 1 tables") {
			t.Errorf("no summary of clean in\n%s", out.String())
		}
	}
}

func TestPanicAndErrorStayInTheirCell(t *testing.T) {
	jobs := wineJobs(t)
	first := true
	fit := func(ctx context.Context, in *model.Table) ([]model.Score, *model.Facts, error) {
		if first {
			first = false
			panic("lost")
		}
		return knowing(jobs, 1)(ctx, in)
	}
	cells := runAll(context.Background(), jobs, 1, fit, io.Discard)
	if cells[0].err == nil || !strings.Contains(cells[0].err.Error(), "lost") {
		t.Errorf("first cell: error %v, want the panic", cells[0].err)
	}
	if cells[1].err != nil {
		t.Errorf("second cell: %v", cells[1].err)
	}
	ctx, cancel := context.WithCancel(context.Background())
	cancel()
	for _, f := range runAll(ctx, jobs, 2, fit, io.Discard) {
		if f.err == nil {
			t.Error("a cell ran after the context had ended")
		}
	}
}

func TestCompareTellsWhatMoved(t *testing.T) {
	jobs := wineJobs(t)
	path := filepath.Join(t.TempDir(), "cells.tsv")
	if err := writeCells(path, runAll(context.Background(), jobs, 2, knowing(jobs, 0.9), io.Discard)); err != nil {
		t.Fatal(err)
	}
	old, err := panel.ReadTSV(path)
	if err != nil {
		t.Fatal(err)
	}
	if len(old) != len(jobs) {
		t.Fatalf("%d lines for %d cells", len(old), len(jobs))
	}
	var out bytes.Buffer
	if err := compare(&out, runAll(context.Background(), jobs, 2, knowing(jobs, 1), io.Discard), old); err != nil {
		t.Fatal(err)
	}
	lines := strings.Split(strings.TrimSpace(out.String()), "\n")
	last := strings.Fields(lines[len(lines)-1])
	// all all 4 cells: ap +0, ece from .1 to 0
	if want := []string{"all", "all", "4", "+0.000", "-0.100"}; len(last) < 5 || strings.Join(last[:5], " ") != strings.Join(want, " ") {
		t.Errorf("last line %q, want it to begin with %q", last, want)
	}
}

func TestCommandLine(t *testing.T) {
	s, err := parse([]string{"dir", "--tables", "a,b", "--seeds", "2", "--procs", "3"}, io.Discard)
	if err != nil || s.dir != "dir" || len(s.tables) != 2 || len(s.seeds) != 1 || s.seeds[0] != 2 || s.procs != 3 {
		t.Errorf("settings %+v, error %v", s, err)
	}
	for _, bad := range []string{"", "a b", "a --seeds x", "a --procs 0", "a --nothing"} {
		if _, err := parse(strings.Fields(bad), io.Discard); err == nil {
			t.Errorf("%q: no error", bad)
		}
	}
}
