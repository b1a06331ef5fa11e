package guard

import (
	"bytes"
	"fmt"
	"os"
	"strings"
	"time"
)

// Cause is what the child died of.
type Cause uint8

// The causes.
const (
	OfMemory   Cause = iota + 1 // it wanted more than the limit
	OfStack                     // its stack grew beyond the limit
	OfHang                      // it got nowhere and was killed
	OfSignal                    // a signal that was not ours
	OfDeafness                  // our kill, after a passed-on signal that it did not obey
	OfPanic                     // anything else that ends a Go program
)

// Death tells how a child ended that did not end by itself.
type Death struct {
	Cause  Cause
	Signal os.Signal     // OfSignal, OfDeafness
	Text   string        // OfPanic: the first line of what the runtime said
	Trace  []byte        // all of it, as far as it was kept
	After  time.Duration // OfHang: how long it got nowhere
	At     Place
}

// How tells it in words that follow "the process".
func (d *Death) How() string {
	switch d.Cause {
	case OfMemory:
		return "ran out of memory"
	case OfStack:
		return "overflowed its stack"
	case OfHang:
		return fmt.Sprintf("made no headway in %v of computing", d.After)
	case OfDeafness:
		return "did not stop on a signal: " + d.Signal.String()
	case OfSignal:
		return "was ended by a signal: " + d.Signal.String()
	}
	return "died: " + d.Text
}

// keptBytes is how much of what the runtime says is kept: its beginning, which tells the cause.
const keptBytes = 64 << 10

// kept is a writer that keeps the beginning.
type kept struct{ text []byte }

func (k *kept) Write(b []byte) (int, error) {
	k.text = append(k.text, b[:min(len(b), keptBytes-len(k.text))]...)
	return len(b), nil
}

// causeOf reads out of the runtime's last words what the process died of; ok is false when they tell of no death. The
// sentences are those of Go's runtime (malloc.go, mem_linux.go, stack.go, os_linux.go, panic.go).
func causeOf(words []byte) (c Cause, line string, ok bool) {
	has := func(s string) bool { return bytes.Contains(words, []byte(s)) }
	switch {
	case has("stack exceeds"), has("fatal error: stack overflow"):
		return OfStack, "", true
	case has("out of memory"), has("cannot allocate memory"), has("failed to create new OS thread"),
		has("fatal error: runtime: cannot map"), has("errno=12"):
		return OfMemory, "", true
	}
	for l := range strings.Lines(string(words)) {
		for _, begin := range []string{"panic: ", "fatal error: ", "SIG", "runtime: "} {
			if strings.HasPrefix(l, begin) {
				return OfPanic, strings.TrimSpace(l), true
			}
		}
	}
	return 0, "", false
}
