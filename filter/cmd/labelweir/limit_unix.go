//go:build unix

package main

import (
	"os/signal"
	"syscall"
)

// limitAsError has a write beyond the user's file size limit (ulimit -f) fail like one on a full disk, instead of ending
// the process with half files left behind.
func limitAsError() { signal.Ignore(syscall.SIGXFSZ) }
