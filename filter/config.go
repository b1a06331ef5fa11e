package filter

import (
	"errors"
	"fmt"
	"runtime"
	"time"

	"labelweir/window"
)

// Mode says what becomes of records with the verdict quarantine.
type Mode uint8

// The modes.
const (
	Observe Mode = iota // every record goes on, tagged
	Divert              // records with the verdict quarantine go to the quarantine output, within the budget
)

// String gives the mode's name as it stands in a configuration.
func (m Mode) String() string {
	if m == Divert {
		return "divert"
	}
	return "observe"
}

// Every says how many rows lie between two retrains: a share of the window or a count. Exactly one is set.
type Every struct {
	Share float64 // of the rows the window stands for, in (0, 1]
	Rows  int     // count of rows
}

// Config of a Sweep.
type Config struct {
	Sliding bool          // the window slides over the input; false: the whole input is one window; default false
	Records int           // most rows trained on at a time; default 20,000
	Span    time.Duration // sliding: how far back in record time the window reaches; default window.NoSpan
	Bytes   int64         // most bytes of rows in the window, and most bytes of rows that wait; default 512 MiB
	Retrain Every         // sliding: rows between two retrains; default a share of 0.05
	Seed    uint64        // of every random draw; default 1

	Mode      Mode    // default Observe
	Precision float64 // share of truly wrong labels wanted among records held back, in (0.5, 1); default 0.95
	Budget    float64 // largest share of the last 10,000 records that may be held back, in (0, 1]; default 0.05
	Hold      int     // sliding: records a record waits for, so that a newer snapshot can score it; default 0
	Cooldown  int     // retrains with normal readings before the breaker closes after a change; default 3
	Workers   int     // goroutines that score and fit; the result does not depend on it; default the number of cores
}

// Default gives the defaults named in Config.
func Default() Config {
	w := window.Default()
	return Config{
		Records: w.Records, Span: w.Span, Bytes: w.Bytes, Retrain: Every{Share: 0.05}, Seed: w.Seed,
		Precision: 0.95, Budget: 0.05, Cooldown: 3, Workers: runtime.NumCPU(),
	}
}

// Validate reports every fault of c at once; each wraps ErrConfig.
func (c Config) Validate() error {
	var faults []error
	check := func(ok bool, format string, args ...any) {
		if !ok {
			faults = append(faults, fmt.Errorf("%w: "+format, append([]any{ErrConfig}, args...)...))
		}
	}
	check(c.Records >= 1, "window.records is %d; at least 1 is needed", c.Records)
	check(c.Span >= 0, "window.span is %v; it can't be negative", c.Span)
	check(c.Span == window.NoSpan || c.Sliding, "window.span is %v but the window does not slide", c.Span)
	check(c.Bytes >= 1, "window.bytes is %d; at least 1 is needed", c.Bytes)
	share, rows := c.Retrain.Share, c.Retrain.Rows
	switch {
	case share != 0 && rows != 0:
		check(false, "retrain.every is both a share and a count; give one")
	case rows != 0:
		check(rows > 0, "retrain.every is %d; at least 1 is needed", rows)
	default:
		check(share > 0 && share <= 1, "retrain.every is a share of %v; it must be above 0 and at most 1", share)
	}
	check(c.Mode == Observe || c.Mode == Divert, "filter.mode is %d; want observe or divert", c.Mode)
	check(c.Precision > 0.5 && c.Precision < 1, "filter.precision is %v; it must lie between 0.5 and 1", c.Precision)
	check(c.Budget > 0 && c.Budget <= 1, "filter.budget is %v; it must be above 0 and at most 1", c.Budget)
	check(c.Hold >= 0, "filter.hold is %d; it can't be negative", c.Hold)
	check(c.Hold == 0 || c.Sliding, "filter.hold is %d but the window does not slide", c.Hold)
	check(c.Cooldown >= 1, "filter.cooldown is %d; at least 1 is needed", c.Cooldown)
	check(c.Workers >= 1, "workers is %d; at least 1 is needed", c.Workers)
	return errors.Join(faults...)
}
