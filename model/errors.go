package model

import "errors"

// What can be wrong with what is handed to this package. Callers use errors.Is.
var (
	ErrTable    = errors.New("table is not consistent")                              // slices of unequal length
	ErrSchema   = errors.New("columns differ from those the snapshot was fitted on") // another name, kind or size
	ErrTooFew   = errors.New("too few labelled rows to learn from")                  // see MinRows
	ErrOneClass = errors.New("only one class has enough rows")                       // nothing to tell apart
	ErrSnapshot = errors.New("not a readable snapshot")                              // foreign or damaged bytes
)
