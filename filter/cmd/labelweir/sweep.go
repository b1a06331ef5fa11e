package main

import (
	"context"
	"errors"
	"fmt"
	"os"
	"strings"
	"time"

	"labelweir/connectors/table"
	"labelweir/filter"
	"labelweir/filter/cmd/labelweir/internal/argv"
	"labelweir/filter/cmd/labelweir/internal/guard"
	"labelweir/filter/cmd/labelweir/internal/sweep"
	"labelweir/filter/cmd/labelweir/internal/term"
	"labelweir/filter/config"
)

func sweepCommand() command {
	return command{
		name: "sweep", usage: "FILE... --label COLUMN --out FILE [FLAG...]",
		brief: "judges every record of a table and writes it back tagged",
		about: `
Every row comes back unchanged and in order, with weir_score (the probability that its label is wrong), weir_verdict,
weir_implied, weir_margin, weir_reason and weir_snapshot appended. With --mode divert the near-certain wrong ones go to
the --quarantine file instead. A summary goes to standard error. Settings may also come from a file (-c) and from the
environment; the README has the table.`,
		shown: sweepExamples(),
		flags: func() []argv.Flag { return sweepFlags(config.NewLoader(), new(string)) },
		run:   runSweep,
	}
}

func sweepExamples() []example {
	return []example{
		{"tag every row of a table, and write down what was found",
			"labelweir sweep grading.arrow --label grade --source grader --out tagged.arrow --report report.json"},
		{"hold back the rows whose labels are near-certainly wrong",
			"labelweir sweep grading.parquet --label grade --mode divert --out passed.parquet --quarantine held.parquet"},
		{"follow graders' habits along the file with a window that slides",
			"labelweir sweep grading.csv --label grade --window 300 --retrain 50% --hold 50 --out sliding.csv"},
		{"go on where a row can't be read, and keep such rows",
			"labelweir sweep grading.csv --label grade --out tagged.csv --unreadable unreadable.jsonl"},
		{"read a folder of files as one table, and write another format",
			"labelweir sweep crates --label grade --out crates.parquet"},
		{"stand in a pipe",
			"cat grading.jsonl | labelweir sweep - --format jsonlines --label grade --out - > tagged.jsonl"},
		{"fail a pipeline when more than a fifth of the labels seem wrong, with settings from a file",
			"labelweir sweep grading.arrow -c weir.yaml --gate 20% --snapshot last.weir"},
		{"keep a journal of a long sweep, and go on with it where the sweep was interrupted",
			"labelweir sweep grading.arrow --label grade --window 300 --retrain 50% --out long.arrow --resume"},
		{"read a file of your own making in the process itself, with no limit of memory",
			"labelweir sweep grading.arrow --label grade --trust --out trusted.arrow"},
	}
}

// sweepFlags makes a flag of every setting that has one; values go to l, and the settings file's name to file.
func sweepFlags(l *config.Loader, file *string) []argv.Flag {
	flags := []argv.Flag{{
		Name: "config", Short: "c", Takes: "FILE", Brief: "settings file",
		Set: func(v string) error { *file = v; return nil },
	}}
	standard := config.Default()
	for _, s := range config.Settings() {
		if s.Flag == "" {
			continue
		}
		brief := s.Doc
		if text := s.Text(&standard); text != "" && s.Takes != "" {
			brief += " (" + text + ")"
		}
		flags = append(flags, argv.Flag{
			Name: s.Flag, Takes: s.Takes, Brief: brief,
			Set: func(v string) error { l.Flag("--"+s.Flag, s.Path, v); return nil },
		})
	}
	return flags
}

func runSweep(ctx context.Context, p *process, args []string) error {
	c, err := sweepSettings(p, args)
	if err != nil {
		return err
	}
	if guard.Supported && p.args != nil && !c.Input.Trust {
		return guarded(p, c)
	}
	var bar *term.Bar
	if p.terminal {
		bar = term.NewBar(p.screen, time.Now)
	}
	report, err := sweep.Run(ctx, c, sweep.Watch{
		Chosen:   func(choice []table.Choice) { tellChoice(p, choice) },
		Progress: bar.Show,
		Marks:    p.marks,
		Tell: func(sentence string) {
			bar.Clear()
			fmt.Fprintln(p.err, sentence)
		},
		Program: version(),
		In:      p.in,
		Out:     p.out,
	})
	bar.Clear()
	if err != nil {
		return err
	}
	// All files are in place; that nobody can read the summary does not make the sweep a failure.
	_ = report.WriteText(p.err)
	return gate(report, c.Gate)
}

// sweepSettings gives the settings from the command line, the environment and the file.
func sweepSettings(p *process, args []string) (*config.Config, error) {
	l, name := config.NewLoader(), ""
	operands, err := argv.Parse(sweepFlags(l, &name), args)
	if err != nil {
		return nil, err
	}
	if len(operands) > 0 {
		l.Flag(operands[0], "input.file.path", strings.Join(operands, "\n"))
	}
	l.Environment(p.environ())
	if name != "" {
		text, err := os.ReadFile(name)
		if err != nil {
			return nil, &failure{exitConfig, fmt.Errorf("%s: %w; name a settings file that can be read", name, plain(err))}
		}
		l.File(name, text)
	}
	return l.Sweep()
}

// plain takes the system call and the path off an error, where the message names the path already.
func plain(err error) error {
	var p *os.PathError
	if errors.As(err, &p) {
		return p.Err
	}
	return err
}

// tellChoice says which columns are learned from, and why others are not.
func tellChoice(p *process, choice []table.Choice) {
	var features []string
	for _, c := range choice {
		if c.Used {
			name := c.Column + " (" + c.Kind.String()
			if c.Why != "" && c.Why != "named" {
				name += "; " + c.Why
			}
			features = append(features, name+")")
		}
	}
	fmt.Fprintf(p.err, "learning from %s\n", strings.Join(features, ", "))
	for _, c := range choice {
		switch {
		case c.Used, c.Why == "not among the fields", strings.HasPrefix(c.Why, "the "):
		default:
			fmt.Fprintf(p.err, "leaving out %s: %s\n", c.Column, c.Why)
		}
	}
}

// gate ends the command with its own code when there are more wrong labels than allowed.
func gate(report *filter.Report, share float64) error {
	above, err := sweep.Above(report, share)
	if err != nil {
		return fmt.Errorf("--gate: %w; see the notes of the report", err)
	}
	if above {
		return &failure{exitGate, fmt.Errorf("--gate: an estimated %.1f%% of the labels are wrong, more than the %.3g%% allowed",
			100*float64(report.Noise.Share.Value), 100*share)}
	}
	return nil
}
