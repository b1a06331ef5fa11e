package main

import (
	"context"
	"fmt"
	"strconv"
	"time"

	"labelweir/filter/cmd/labelweir/internal/argv"
	"labelweir/filter/cmd/labelweir/internal/demo"
	"labelweir/filter/cmd/labelweir/internal/sweep"
	"labelweir/filter/cmd/labelweir/internal/term"
)

func demoCommand() command {
	return command{
		name: "demo", usage: "[FLAG...]", brief: "sweeps an invented apple packing line and shows what was found",
		about: `
Sensor readings, several graders, and one of them who begins to confuse two grades halfway: all drawn from a seed, so that
it is known which grades are wrong. The line goes through the same sweep as any file of yours; afterwards what was found
is set against what was planted.`,
		words: noWords,
		flags: func() []argv.Flag { return demoFlags(new(demo.Options)) },
		run:   runDemo,
	}
}

func demoFlags(o *demo.Options) []argv.Flag {
	return []argv.Flag{
		{Name: "rows", Takes: "COUNT", Brief: "apples on the line (8000)", Set: func(v string) (err error) {
			if o.Rows, err = strconv.Atoi(v); err != nil || o.Rows < demo.MinRows {
				return fmt.Errorf("%q is not a whole number from %d on", v, demo.MinRows)
			}
			return nil
		}},
		{Name: "seed", Takes: "NUMBER", Brief: "seed of the line and of the sweep (1)", Set: func(v string) (err error) {
			if o.Seed, err = strconv.ParseUint(v, 10, 64); err != nil {
				return fmt.Errorf("%q is not a whole number from 0 on", v)
			}
			return nil
		}},
		{Name: "window", Takes: "ROWS", Brief: "let a window of so many rows slide over the line", Set: func(v string) (err error) {
			if o.Window, err = strconv.Atoi(v); err != nil || o.Window < demo.MinRows {
				return fmt.Errorf("%q is not a whole number from %d on", v, demo.MinRows)
			}
			return nil
		}},
		{Name: "out", Takes: "DIR", Brief: "folder to keep all files in; otherwise they are removed", Set: func(v string) error {
			o.Dir = v
			return nil
		}},
	}
}

func runDemo(ctx context.Context, p *process, args []string) error {
	o := demo.DefaultOptions()
	operands, err := argv.Parse(demoFlags(&o), args)
	if err != nil {
		return err
	}
	if err := noOperands("demo", operands); err != nil {
		return err
	}
	var bar *term.Bar
	if p.terminal {
		bar = term.NewBar(p.screen, time.Now)
	}
	defer bar.Clear()
	_, err = demo.Run(ctx, o, barred{p, bar}, sweep.Watch{Progress: bar.Show})
	return err
}

// barred clears the bar before text goes out, so that the two don't mix on one terminal.
type barred struct {
	p   *process
	bar *term.Bar
}

func (b barred) Write(text []byte) (int, error) {
	b.bar.Clear()
	return b.p.out.Write(text)
}
