package main

import (
	"context"
	"errors"
	"fmt"
	"os"
	"strings"
	"syscall"

	"labelweir/connectors/table"
	"labelweir/filter"
	"labelweir/filter/cmd/labelweir/internal/argv"
	"labelweir/filter/config"
)

// The exit codes. Those from 64 on have the meaning that BSD's sysexits.h gives them.
const (
	exitFailed  = 1   // failed while running
	exitGate    = 3   // more wrong labels than --gate allows
	exitUsage   = 64  // unknown command or flag
	exitInput   = 65  // the input can't be read
	exitCreate  = 73  // an output can't be created
	exitWrite   = 74  // an output can't be written to its end
	exitConfig  = 78  // the settings are wrong
	exitSignals = 128 // plus the signal's number: 130 for Ctrl-C, 143 for SIGTERM
)

// failure is an error with the exit code it ends the program with.
type failure struct {
	code int
	err  error
}

func (f *failure) Error() string { return f.err.Error() }
func (f *failure) Unwrap() error { return f.err }

// usagef makes a fault in how the command was called.
func usagef(format string, args ...any) error {
	return &failure{exitUsage, fmt.Errorf(format, args...)}
}

// stopped is the cause of a context that a signal has ended.
type stopped struct{ signal os.Signal }

func (s stopped) Error() string { return "stopped by " + s.signal.String() }

// bySignal tells whether err comes from a signal that has ended ctx.
func bySignal(ctx context.Context, err error) (s stopped, ok bool) {
	if errors.As(err, &s) {
		return s, true
	}
	return s, errors.Is(err, context.Canceled) && errors.As(context.Cause(ctx), &s)
}

// code gives the exit code of what a command returned.
func code(ctx context.Context, err error) int {
	if s, ok := bySignal(ctx, err); ok {
		if n, ok := s.signal.(syscall.Signal); ok {
			return exitSignals + int(n)
		}
		return exitFailed
	}
	var said *passed
	var f *failure
	var a *argv.Error
	var faults config.Faults
	switch {
	case err == nil:
		return 0
	case errors.As(err, &said):
		return said.code
	case errors.As(err, &f):
		return f.code
	case errors.As(err, &a):
		return exitUsage
	case errors.As(err, &faults):
		return faultCode(faults)
	case errors.Is(err, table.ErrUnreadable), errors.Is(err, table.ErrColumn), errors.Is(err, filter.ErrChanged):
		return exitInput
	case errors.Is(err, table.ErrTarget):
		return exitCreate
	case errors.Is(err, table.ErrWrite):
		return exitWrite
	case errors.Is(err, filter.ErrConfig), errors.Is(err, filter.ErrNoTime):
		return exitConfig
	}
	return exitFailed
}

// faultCode tells a command line that was mistyped from settings that are wrong.
func faultCode(faults config.Faults) int {
	for _, f := range faults {
		if f.Layer != config.FromFlag {
			return exitConfig
		}
	}
	return exitUsage
}

// say writes err for a person to read: one line a fault, each beginning with the program's name.
func say(ctx context.Context, p *process, err error) {
	if s, ok := bySignal(ctx, err); ok {
		fmt.Fprintf(p.err, "labelweir: %v; no output was written\n", s)
		return
	}
	if said := (*passed)(nil); errors.As(err, &said) {
		return
	}
	for line := range strings.Lines(strings.TrimRight(err.Error(), "\n")) {
		fmt.Fprintf(p.err, "labelweir: %s\n", strings.TrimRight(line, "\n"))
	}
}
