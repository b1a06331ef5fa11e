package filter

import (
	"errors"
	"fmt"
)

// What can go wrong in this package. Callers use errors.Is.
var (
	ErrConfig  = errors.New("configuration")                   // a setting that makes no sense
	ErrChanged = errors.New("input changed while it was read") // see ChangedError
	ErrNoTime  = errors.New("window.span needs a time field")  // the input's batches come without times
	ErrBatch   = errors.New("source broke its promise")        // rows missing, repeated or of another shape
)

// ChangedError tells that the second reading of an input did not give what the first did. It unwraps to ErrChanged.
type ChangedError struct {
	FirstRows, SecondRows int64 // rows read before the difference was sure
}

// Error says what differs and what to do.
func (e *ChangedError) Error() string {
	if e.FirstRows != e.SecondRows {
		return fmt.Sprintf("%v: %d rows at first, then %d; run again when nothing writes to it",
			ErrChanged, e.FirstRows, e.SecondRows)
	}
	return fmt.Sprintf("%v: still %d rows, but other values; run again when nothing writes to it",
		ErrChanged, e.FirstRows)
}

// Unwrap gives ErrChanged.
func (e *ChangedError) Unwrap() error { return ErrChanged }
