package main

import (
	"errors"
	"fmt"
	"os"
	"strings"
	"syscall"
	"time"

	"labelweir/connectors/table"
	"labelweir/filter/cmd/labelweir/internal/guard"
	"labelweir/filter/config"
)

// Bounds of the guarded process. A batch is read in seconds at most, so that a minute of computing in one place is a
// loop; what stops in an orderly way does so within the grace.
const (
	hang  = time.Minute
	grace = 10 * time.Second
)

// passed is the end of a child that has said itself what there was to say.
type passed struct{ code int }

func (p *passed) Error() string { return fmt.Sprintf("the guarded process ended with code %d", p.code) }

// guarded runs the sweep in a child of this process. What ends the child becomes an error here, and what it left half
// written is removed.
func guarded(p *process, c *config.Config) error {
	people, ok := p.screen.(*os.File)
	if !ok {
		people = os.Stderr
	}
	code, pid, d, err := guard.Run(guard.Command{Args: p.args, Bytes: c.MemoryLimit(), Hang: hang, Grace: grace, Err: people})
	switch {
	case err != nil:
		return fmt.Errorf("sweep: %w; give --trust to read the file in the process itself", err)
	case d == nil && code == 0:
		return nil
	case d == nil:
		return &passed{code}
	}
	if p.terminal {
		fmt.Fprint(p.screen, "\r\x1b[K") // a bar may stand there
	}
	errs := []error{died(d, c)}
	for _, name := range c.Output.Files() {
		errs = append(errs, table.RemoveParts(name, pid))
	}
	return errors.Join(errs...)
}

// died says what ended the child, where it was, and what to do.
func died(d *guard.Death, c *config.Config) error {
	if d.Cause == guard.OfDeafness {
		return stopped{d.Signal}
	}
	how := "the process that read it " + d.How()
	if d.Cause == guard.OfMemory {
		how += " beyond the " + size(c.MemoryLimit()) + " it may take"
	}
	if d.At.Reading {
		return &failure{exitInput, fmt.Errorf("%s%s: %s; %s", d.At.File, where(d.At), how, readingAdvice(d))}
	}
	phase := d.At.Phase
	if phase == "" {
		phase = "start"
	}
	how = strings.Replace(how, "process that read it", "guarded process", 1)
	return &failure{exitFailed, fmt.Errorf("sweep: in the phase %s %s; %s", phase, how, workingAdvice(d))}
}

// where tells the place in the file that was being read.
func where(at guard.Place) string {
	text := ""
	if at.Batch > 0 {
		text = fmt.Sprintf(": %s %d", at.Unit, at.Batch)
	}
	if at.Column != "" {
		text += fmt.Sprintf(", column %q", at.Column)
	}
	return text
}

func readingAdvice(d *guard.Death) string {
	switch d.Cause {
	case guard.OfMemory:
		return "the file is damaged, or too large for this limit: write it again, or raise input.memory"
	case guard.OfSignal:
		if d.Signal == syscall.SIGKILL {
			return "somebody ended it, or the machine ran out of memory"
		}
	}
	return "the file is damaged: write it again"
}

func workingAdvice(d *guard.Death) string {
	switch d.Cause {
	case guard.OfMemory:
		return "lower window.records or window.bytes, or raise input.memory"
	case guard.OfSignal:
		if d.Signal == syscall.SIGKILL {
			return "somebody ended it, or the machine ran out of memory"
		}
	}
	return "this is a fault of labelweir; run with --trust to see all that it says"
}

// size writes bytes the way settings do.
func size(n int64) string {
	for _, s := range config.Settings() {
		if s.Path == "input.memory" {
			return s.Text(&config.Config{Input: config.Input{Memory: n}})
		}
	}
	return fmt.Sprint(n)
}
