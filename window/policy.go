package window

import (
	"errors"
	"fmt"
	"time"
)

// NoSpan, as a Policy's Span, sets no limit on the age of a row.
const NoSpan time.Duration = 0

// Keep says which rows stay when more have arrived than fit.
type Keep uint8

// The ways to keep rows.
const (
	// Latest keeps the rows that arrived last. It takes no Span.
	Latest Keep = iota + 1
	// Uniform keeps a uniform sample: of the last Span of record time, or with NoSpan of everything that arrived.
	Uniform
)

// Policy bounds a window.
type Policy struct {
	Records int           // most rows in a view; default 20,000
	Span    time.Duration // age in record time above which a row leaves; NoSpan: any age; default NoSpan
	Bytes   int64         // most bytes of rows stored, not counting the views handed out; default 512 MiB
	Keep    Keep          // which rows stay; default Latest

	// Floor is the number of rows that every class keeps in a uniform sample, if it has that many, however rare it
	// is; default 25. Such a class then stands in the sample with more than its share, by Floor rows at most: rates
	// by class are not touched by that, an overall rate by less than classes·Floor/Records. When many classes would
	// fill more than half the sample in this way, the floor is lowered to Records/(2·classes).
	Floor int

	Seed uint64 // of the order in which a sample is drawn; default 1
}

// Default gives the defaults named in Policy.
func Default() Policy {
	return Policy{Records: 20_000, Span: NoSpan, Bytes: 512 << 20, Keep: Latest, Floor: 25, Seed: 1}
}

// Validate reports every fault of p at once; each wraps ErrPolicy.
func (p Policy) Validate() error {
	var faults []error
	fault := func(format string, args ...any) {
		faults = append(faults, fmt.Errorf("%w: "+format, append([]any{ErrPolicy}, args...)...))
	}
	if p.Records < 1 {
		fault("records is %d; at least 1 is needed", p.Records)
	}
	if p.Span < 0 {
		fault("span is %v; it can't be negative", p.Span)
	}
	if p.Bytes < 1 {
		fault("bytes is %d; at least 1 is needed", p.Bytes)
	}
	if p.Keep != Latest && p.Keep != Uniform {
		fault("keep is %d; want Latest or Uniform", p.Keep)
	}
	if p.Keep == Latest && p.Span > 0 {
		fault("keep Latest takes no span; a span is sampled with Uniform")
	}
	if p.Floor < 0 {
		fault("floor is %d; it can't be negative", p.Floor)
	}
	return errors.Join(faults...)
}
