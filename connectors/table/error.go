package table

import (
	"errors"
	"fmt"
	"runtime"
	"strings"
)

// What can go wrong, for errors.Is. Each [Error] wraps one of them and, where there is one, the cause beneath.
var (
	ErrUnreadable = errors.New("input can't be read")        // missing, foreign, damaged, or values that mean nothing here
	ErrColumn     = errors.New("column can't be used")       // unknown, ambiguous or of a type that does not fit its part
	ErrTarget     = errors.New("output can't be created")    // exists, same as another, folder missing or not writable
	ErrWrite      = errors.New("output can't be written")    // the disk refused while writing
	ErrClosed     = errors.New("used after close or commit") // a caller's mistake
)

// Error says where, what, and what to do. Zero fields are left out of the text.
type Error struct {
	Path   string // the file
	Batch  int    // record batch, counted from 1
	Group  int    // row group, counted from 1
	Line   int64  // line, counted from 1
	Row    int64  // row of the input, counted from 1
	Column string // column name
	What   string // what is wrong
	Do     string // what to do about it
	Kind   error  // one of the sentinels
	Err    error  // the cause, may be nil
}

// Error gives "file: record batch 3, row 1027, column "grade": what; what to do".
func (e *Error) Error() string {
	var at []string
	if e.Batch > 0 {
		at = append(at, fmt.Sprintf("record batch %d", e.Batch))
	}
	if e.Group > 0 {
		at = append(at, fmt.Sprintf("row group %d", e.Group))
	}
	if e.Line > 0 {
		at = append(at, fmt.Sprintf("line %d", e.Line))
	}
	if e.Row > 0 {
		at = append(at, fmt.Sprintf("row %d", e.Row))
	}
	if e.Column != "" {
		at = append(at, fmt.Sprintf("column %q", e.Column))
	}
	s := e.Path + ": "
	if len(at) > 0 {
		s += strings.Join(at, ", ") + ": "
	}
	s += e.What
	if e.Err != nil && e.Err.Error() != "" {
		s += ": " + libraries().Replace(e.Err.Error())
	}
	if e.Do != "" {
		s += "; " + e.Do
	}
	return s
}

// libraries takes out of a cause what only those who know the library can make sense of.
func libraries() *strings.Replacer {
	return strings.NewReplacer("arrow/ipc: ", "", "arrow/array: ", "", "unknown error while reading: ", "", "parquet: ", "", "*parquet.", "")
}

// Unwrap gives the sentinel and the cause.
func (e *Error) Unwrap() []error {
	if e.Err == nil {
		return []error{e.Kind}
	}
	return []error{e.Kind, e.Err}
}

// At is an error that stands at a place.
func At(p Place, kind error, what, do string, err error) *Error {
	return &Error{Path: p.Path, Batch: p.Batch, Group: p.Group, Line: p.Line, What: what, Do: do, Kind: kind, Err: err}
}

// Caught turns what recover gave into an error.
func Caught(p any) error {
	if err, ok := p.(error); ok {
		return Plain(err)
	}
	return fmt.Errorf("%v", p)
}

// Plain is err, or, when it or what a library made of it is a runtime error of Go, a sentence that tells a reader more.
func Plain(err error) error {
	if err == nil {
		return nil
	}
	if fault := (runtime.Error)(nil); errors.As(err, &fault) || strings.Contains(err.Error(), "runtime error: ") {
		return contradiction{err}
	}
	return err
}

// contradiction is what damaged bytes make Go's bounds checks say.
type contradiction struct{ error }

func (contradiction) Error() string   { return "lengths or places in it contradict each other" }
func (c contradiction) Unwrap() error { return c.error }
