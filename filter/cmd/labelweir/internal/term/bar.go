package term

import (
	"fmt"
	"io"
	"strings"
	"time"
)

// Bar shows on one line of a terminal what is being done and how far it is. Its methods are called from one goroutine
// at a time. The nil Bar shows nothing.
type Bar struct {
	w     io.Writer
	now   func() time.Time
	drawn time.Time // when it was last drawn
	phase string    // drawn last
	shown bool      // something stands on the line
}

// barWidth is the count of cells of a full bar, and barPause the least time between two drawings of one phase, so that
// drawing costs nothing beside the work.
const (
	barWidth = 24
	barPause = 100 * time.Millisecond
)

// NewBar returns a bar that draws on w.
func NewBar(w io.Writer, now func() time.Time) *Bar { return &Bar{w: w, now: now} }

// Show draws the phase, with how much of total is done; total 0 is not known. It skips drawings that come too fast.
func (b *Bar) Show(phase string, done, total int64) {
	if b == nil {
		return
	}
	now := b.now()
	if phase == b.phase && now.Sub(b.drawn) < barPause && done != total {
		return
	}
	b.drawn, b.phase, b.shown = now, phase, true
	if total <= 0 {
		fmt.Fprintf(b.w, "\r\x1b[K%-16s %d", phase, done)
		return
	}
	done = min(max(done, 0), total)
	full := int(done * barWidth / total)
	fmt.Fprintf(b.w, "\r\x1b[K%-16s %s%s %3d %%", phase,
		strings.Repeat("█", full), strings.Repeat("░", barWidth-full), done*100/total)
}

// Clear empties the line for other text.
func (b *Bar) Clear() {
	if b == nil || !b.shown {
		return
	}
	fmt.Fprint(b.w, "\r\x1b[K")
	b.shown, b.phase = false, ""
}
