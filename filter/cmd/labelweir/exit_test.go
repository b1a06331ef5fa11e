package main

import (
	"context"
	"errors"
	"fmt"
	"os"
	"syscall"
	"testing"

	"labelweir/connectors/table"
	"labelweir/filter"
	"labelweir/filter/cmd/labelweir/internal/argv"
	"labelweir/filter/config"
)

func TestErrorsHaveTheirExitCodes(t *testing.T) {
	for _, c := range []struct {
		err  error
		want int
	}{
		{nil, 0},
		{errors.New("something"), 1},
		{&argv.Error{Where: "--x", What: "unknown"}, 64},
		{usagef("no"), 64},
		{config.Faults{{Layer: config.FromFlag}}, 64},
		{config.Faults{{Layer: config.FromFlag}, {Layer: config.FromFile}}, 78},
		{config.Faults{{Layer: config.FromEnvironment}}, 78},
		{&table.Error{Kind: table.ErrUnreadable}, 65},
		{&table.Error{Kind: table.ErrColumn}, 65},
		{fmt.Errorf("while: %w", &filter.ChangedError{}), 65},
		{&table.Error{Kind: table.ErrTarget}, 73},
		{&table.Error{Kind: table.ErrWrite, Err: syscall.ENOSPC}, 74},
		{fmt.Errorf("%w: window.records", filter.ErrConfig), 78},
		{&failure{exitGate, errors.New("too many")}, 3},
		{context.Canceled, 1}, // not by a signal
	} {
		if got := code(t.Context(), c.err); got != c.want {
			t.Errorf("%v ends with %d, want %d", c.err, got, c.want)
		}
	}
}

func TestASignalsExitCodeIs128AndItsNumber(t *testing.T) {
	for s, want := range map[os.Signal]int{os.Interrupt: 130, syscall.SIGTERM: 143} {
		ctx, stop := context.WithCancelCause(t.Context())
		stop(stopped{s})
		if got := code(ctx, fmt.Errorf("reading: %w", ctx.Err())); got != want {
			t.Errorf("%v ends with %d, want %d", s, got, want)
		}
	}
}
