package model

import "io"

// Snapshot is one trained, immutable scorer. It may be shared between goroutines.
type Snapshot struct {
	id    string
	facts Facts
}

// ID is 12 hexadecimal digits of a hash over the saved bytes.
func (s *Snapshot) ID() string { return s.id }

// Facts tells what the snapshot was fitted on and what it found.
func (s *Snapshot) Facts() *Facts { return &s.facts }

// WriteTo saves the snapshot in its own checksummed format.
func (s *Snapshot) WriteTo(w io.Writer) (int64, error) { return 0, nil }

// ReadSnapshot loads what WriteTo saved; anything else is an error that wraps ErrSnapshot.
func ReadSnapshot(r io.Reader) (*Snapshot, error) { return nil, ErrSnapshot }

// Scorer judges rows that the snapshot was not trained on. It owns scratch memory and belongs to one goroutine.
type Scorer struct {
	s *Snapshot
}

// NewScorer returns a scorer of s.
func (s *Snapshot) NewScorer() *Scorer { return &Scorer{s: s} }

// Score writes into dst[i−lo] what the snapshot says of rows lo ≤ i < hi of t; len(dst) = hi−lo. Columns are matched
// by name; classes and levels the snapshot never met are NewClass and missing values. It allocates nothing once it has
// met the table's classes and levels. The error wraps ErrSchema.
func (sc *Scorer) Score(t *Table, lo, hi int, dst []Score) error { return nil }
