package filter

import (
	"context"

	"labelweir/model"
)

// Field names one input field of a record and how to read it.
type Field struct {
	Path string // column name in tables
	Kind model.Kind
	Size int // Vector only
}

// Record says which parts of a record mean what.
type Record struct {
	Label  string  // field of the observed label
	Source string  // field that tells who or what labelled it; empty: none
	Time   string  // field of the record's time; empty: none
	Fields []Field // empty: inferred from the schema
}

// NoTime stands in Batch.Times for a record without a readable time.
const NoTime = int64(-1 << 63)

// Batch is a run of records of one input, in input order.
type Batch struct {
	First   int64        // number of its first record in the input, from 0; its Table.Keys are model.Key(row number)
	Table   *model.Table // features, labels and sources; class and level lists only grow from batch to batch
	Times   []int64      // nanoseconds since 1970, or NoTime; nil when the input has no time field
	Payload any          // what the matching Sink needs to write the records as they came; not looked at here
	Release func()       // gives the batch's memory back; the owner calls it once, after delivery; never nil
}

// Rows is the number of records in the batch.
func (b *Batch) Rows() int { return b.Table.Rows() }

// Source reads records. It belongs to one goroutine.
type Source interface {
	// Next returns the next batch, which the caller then owns until it calls Release; io.EOF after the last. It
	// blocks until there is one or ctx ends. An error other than io.EOF is final.
	Next(ctx context.Context) (*Batch, error)
	// Close gives back what the source holds; batches not yet released stay valid.
	Close() error
}

// Sink writes tagged records. It belongs to one goroutine.
type Sink interface {
	// Deliver writes all records of b, in order, each with its tag: to the quarantine when the tag says so, else to
	// the tagged output. len(tags) = b.Rows(). It keeps neither argument.
	Deliver(ctx context.Context, b *Batch, tags []Tag) error
	// Commit makes everything delivered visible under its final name. No other call may follow but Close.
	Commit(ctx context.Context) error
	// Close without Commit leaves nothing behind.
	Close() error
}

// Verdict is what is to be done with a record.
type Verdict uint8

// The verdicts.
const (
	Pass Verdict = iota
	Suspect
	Quarantine
	Unscored
)

// String gives the verdict's name as users meet it.
func (v Verdict) String() string {
	return [...]string{"pass", "suspect", "quarantine", "unscored"}[v]
}

// Tag is what is added to a record. Divert is set when the record goes to the quarantine output; in observe mode a
// record may have the verdict quarantine and still go on.
type Tag struct {
	Score    float64 // NaN when unscored
	Margin   float64 // NaN when unscored
	Implied  string  // class name; empty when unscored
	Snapshot string  // id of the snapshot that scored it; empty when there was none
	Verdict  Verdict
	Reason   model.Reason // Scored unless the verdict is Unscored
	Divert   bool
}
