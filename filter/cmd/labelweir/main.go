// Labelweir finds wrong labels in labelled records: it gives every record a calibrated probability that its label is
// wrong and can hold the near-certain ones back. Run "labelweir help" for its commands.
package main

import (
	"context"
	"io"
	"os"
	"os/signal"
	"syscall"

	"labelweir/filter/cmd/labelweir/internal/term"
)

func main() { os.Exit(start()) }

// start runs the command on the process's own streams until it ends or a signal stops it, and gives the exit code.
func start() int {
	limitAsError()
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
	return run(ctx, &process{
		out:      &output{w: os.Stdout},
		err:      os.Stderr,
		terminal: term.Is(os.Stderr),
		environ:  os.Environ,
	}, os.Args[1:])
}

// process is what a command sees of the outside.
type process struct {
	out      *output   // data asked for; nothing else
	err      io.Writer // everything a person reads
	terminal bool      // err is a terminal
	environ  func() []string
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
