// Labelweir finds wrong labels in labelled records: it gives every record a calibrated probability that its label is
// wrong and can hold the near-certain ones back. Run "labelweir help" for its commands.
package main

import (
	"context"
	"fmt"
	"io"
	"os"
	"os/signal"
	"syscall"
	"time"

	"labelweir/filter/cmd/labelweir/internal/guard"
	"labelweir/filter/cmd/labelweir/internal/term"
)

func main() { os.Exit(start()) }

// start runs the command on the process's own streams until it ends or a signal stops it, and gives the exit code.
func start() int {
	limitAsError()
	signal.Ignore(syscall.SIGPIPE) // whoever reads our output may stop early: writing fails then, as it should
	child, err := guard.Join()
	if err != nil {
		fmt.Fprintf(os.Stderr, "labelweir: %v\n", err)
		return exitFailed
	}
	p := &process{in: os.Stdin, out: &output{w: os.Stdout}, environ: os.Environ, args: os.Args}
	ctx, stop := context.WithCancelCause(context.Background())
	defer stop(nil)
	signals := make(chan os.Signal, 1) // one is enough to stop; a second one while stopping changes nothing
	signal.Notify(signals, os.Interrupt, syscall.SIGTERM)
	defer signal.Stop(signals)
	go func() { // ends with ctx, at the latest when start returns
		select {
		case s := <-signals:
			stop(stopped{s})
		case <-ctx.Done():
		}
	}()
	people := os.Stderr
	if child != nil {
		people, p.marks, p.args = child.Err, child.Marks, nil
		go orphaned(child, stop) // ends with the process
	}
	p.err, p.screen, p.terminal = term.Clean(people), people, term.Is(people)
	return run(ctx, p, os.Args[1:])
}

// orphaned stops a child whose parent is gone, first in the way a signal does, so that it leaves no half file.
func orphaned(child *guard.Child, stop func(error)) {
	<-child.Orphan
	stop(stopped{syscall.SIGTERM})
	time.Sleep(grace)
	os.Exit(exitFailed)
}

// process is what a command sees of the outside.
type process struct {
	in       io.Reader
	out      *output   // data asked for; nothing else
	err      io.Writer // everything a person reads
	screen   io.Writer // err for what draws on a terminal
	terminal bool      // err is a terminal
	environ  func() []string
	args     []string     // to start this program again with, its own name first; nil: what runs is the child already
	marks    *guard.Marks // in a child: where it is; else nil
}

// output is standard output; it keeps the first error, so that it need not be looked at after every line.
type output struct {
	w   io.Writer
	err error
}

func (o *output) Write(text []byte) (int, error) {
	if o.err != nil {
		return 0, o.err
	}
	n, err := o.w.Write(text)
	o.err = err
	return n, err
}
