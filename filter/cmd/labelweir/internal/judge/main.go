// Judge runs the model over a panel of tables with known wrong labels and sets its figures beside those that other
// methods reached. It is for those who change the model; users never meet it.
//
//	go run ./filter/cmd/labelweir/internal/judge PANEL_DIR [flags]
//
// Each cell, a table with the noise of one plan and seed, is fitted once; the figures are means over the seeds.
// --out keeps every cell's figures in a file, and --compare tells what moved against such a file.
//
// With --streams the panel's streams are gone through instead, with a sliding window, each row judged as it arrives.
package main

import (
	"context"
	"errors"
	"flag"
	"fmt"
	"io"
	"os"
	"os/signal"
	"path/filepath"
	"runtime/pprof"
	"strconv"
	"strings"

	"labelweir/filter/cmd/labelweir/internal/judge/panel"
)

// settings is what the command line says.
type settings struct {
	dir           string
	tables, plans []string // empty: all
	seeds         []int
	procs         int
	out, compare  string
	profile       string
	streams       bool
	sliding       sliding
}

func main() {
	ctx, stop := signal.NotifyContext(context.Background(), os.Interrupt)
	defer stop()
	if err := run(ctx, os.Args[1:], os.Stdout, os.Stderr); err != nil {
		fmt.Fprintln(os.Stderr, "judge:", err)
		os.Exit(1)
	}
}

func run(ctx context.Context, args []string, stdout, stderr io.Writer) error {
	s, err := parse(args, stderr)
	if err != nil {
		return err
	}
	if s.profile != "" {
		w, err := os.Create(s.profile)
		if err != nil {
			return err
		}
		defer w.Close()
		if err := pprof.StartCPUProfile(w); err != nil {
			return err
		}
		defer pprof.StopCPUProfile()
	}
	if s.streams {
		return overStreams(ctx, s, stdout, stderr)
	}
	return overTables(ctx, s, stdout, stderr)
}

func overStreams(ctx context.Context, s settings, stdout, stderr io.Writer) error {
	base, err := panel.ReadStreamBaselines(s.dir)
	if err != nil {
		return err
	}
	streams, err := runStreams(ctx, s, stderr)
	if err != nil {
		return err
	}
	if err := reportStreams(stdout, streams, base); err != nil {
		return err
	}
	if s.out != "" {
		return writeStreams(s.out, streams)
	}
	return nil
}

func overTables(ctx context.Context, s settings, stdout, stderr io.Writer) error {
	base, err := panel.ReadBaselines(filepath.Join(s.dir, "baselines.tsv"))
	if err != nil {
		return err
	}
	jobs, err := plan(s)
	if err != nil {
		return err
	}
	var old []map[string]string
	if s.compare != "" {
		if old, err = panel.ReadTSV(s.compare); err != nil {
			return err
		}
	}
	cells := runAll(ctx, jobs, s.procs, sweepTable, stderr)
	if err := report(stdout, cells, base); err != nil {
		return err
	}
	if old != nil {
		if err := compare(stdout, cells, old); err != nil {
			return err
		}
	}
	if s.out != "" {
		return writeCells(s.out, cells)
	}
	return nil
}

// parse reads the command line; flags may stand before or after the folder.
func parse(args []string, stderr io.Writer) (settings, error) {
	s := settings{sliding: sliding{bounds: standardBounds()}}
	var tables, plans, seeds string
	f := flag.NewFlagSet("judge", flag.ContinueOnError)
	f.SetOutput(stderr)
	f.StringVar(&tables, "tables", "", "tables or streams to run, separated by commas (all)")
	f.BoolVar(&s.streams, "streams", false, "go through the streams instead of the tables")
	f.IntVar(&s.sliding.window, "window", 3000, "streams: rows in the window")
	f.IntVar(&s.sliding.hold, "hold", 0, "streams: rows that a row waits for before it is judged")
	f.StringVar(&s.sliding.rows, "rows", "", "streams: folder to write each stream's rows with their scores to")
	f.Float64Var(&s.sliding.retrain, "retrain", 0.05, "streams: rows between two retrains, as a share of the window")
	f.StringVar(&plans, "plans", "", "noise plans to run (all)")
	f.StringVar(&seeds, "seeds", "0,1,2", "seeds of the noise to run")
	f.IntVar(&s.procs, "procs", 2, "cells run at the same time, one core each")
	f.StringVar(&s.out, "out", "", "file to write every cell's figures to, tab-separated")
	f.StringVar(&s.compare, "compare", "", "file written by --out to tell the differences against")
	f.StringVar(&s.profile, "profile", "", "file to write a CPU profile to")
	for len(args) > 0 {
		if err := f.Parse(args); err != nil {
			return s, err
		}
		args = f.Args()
		if len(args) > 0 {
			if s.dir != "" {
				return s, fmt.Errorf("two folders, %s and %s; name one", s.dir, args[0])
			}
			s.dir, args = args[0], args[1:]
		}
	}
	if s.dir == "" {
		return s, errors.New("no folder; say judge PANEL_DIR")
	}
	if s.procs < 1 {
		return s, fmt.Errorf("--procs %d: give 1 or more", s.procs)
	}
	if s.streams && s.compare != "" {
		return s, errors.New("--compare is for tables; leave --streams out")
	}
	s.tables, s.plans = list(tables), list(plans)
	for _, text := range list(seeds) {
		n, err := strconv.Atoi(text)
		if err != nil {
			return s, fmt.Errorf("--seeds %s: %q is not a whole number", seeds, text)
		}
		s.seeds = append(s.seeds, n)
	}
	return s, nil
}

func list(text string) []string {
	return strings.FieldsFunc(text, func(r rune) bool { return r == ',' || r == ' ' })
}
