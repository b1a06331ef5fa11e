package filter

import (
	"bytes"
	"encoding/binary"
	"errors"
	"fmt"
	"io"

	"labelweir/filter/internal/journal"
)

// Journal keeps the dear part of a sweep, what was trained and judged, so that another sweep of the same input with the
// same settings can go on where this one was interrupted, and in the end gives the same. It is for one Sweep.
//
// The streams of its file. Integers are little-endian, a text is u32 length and its bytes, a score is i64 row number,
// f64 P, f64 margin, i32 implied class, u8 reason.
//
//	1  conditions: u32 count, each: text name, text value
//	2  trainings, each: u8 outcome: 0 a snapshot, 1 too few rows, 2 one class only; u64 sum of the rows trained on;
//	   outcome 0: text id, text facts, u64 rows that disagree, u64 rows with a score; else: text reason
//	3  sliding: scores of rows that came in, as the snapshot of that moment judged them for the breaker
//	4  scores of rows as they were decided; of a whole input, those of the rows trained on
//	5  of a whole input: the saved snapshot
//
// A mark is u64 trainings before it, u64 of them with a snapshot, i64 rows read, u64 sum of the rows of the training after
// it. With a sliding window one is set where a training did not start from the one before, and stands for the moment
// before it; there nothing else needs to be known. Of a whole input one is set behind the training.
type Journal struct {
	file       *journal.Journal
	conditions []Condition
	last       point
	resumed    bool
}

// JournalFile is what a Journal stands in, such as an *os.File. Its errors come back from Run as they are.
type JournalFile = journal.File

// Condition is one thing that must be the same for a sweep to go on with another's journal.
type Condition struct{ Name, Value string }

// ErrForeignJournal is a file that is no journal of this version.
var ErrForeignJournal = journal.ErrForeign

// ErrJournal is a journal that does not go with the input, although all conditions are the same.
var ErrJournal = errors.New("the journal does not go with the input")

// OtherError tells which condition is not what it was; Now or Was is empty where there is none of that name.
type OtherError struct{ Name, Was, Now string }

// Error says what differs.
func (e *OtherError) Error() string {
	return fmt.Sprintf("the journal is of a sweep with %s %q, not %q", e.Name, e.Was, e.Now)
}

// The streams.
const (
	streamConditions = 1 + iota
	streamTrainings
	streamArrivals
	streamDecided
	streamSnapshot
)

// point is what a mark holds.
type point struct {
	trainings, snapshots uint64
	rows                 int64
	next                 uint64 // sum of the rows of the training after it
}

// OpenJournal reads what the file holds and changes nothing; an empty one will be begun by the sweep. Errors:
// ErrForeignJournal, *OtherError for the first condition that differs, and the file's as they are.
func OpenJournal(f JournalFile, conditions []Condition) (*Journal, error) {
	file, err := journal.Open(f)
	if err != nil {
		return nil, err
	}
	j := &Journal{file: file, conditions: conditions}
	mark, marks := file.Last()
	if marks == 0 {
		return j, nil
	}
	if len(mark) != 4*8 {
		return nil, fmt.Errorf("%w: a mark has %d bytes", ErrForeignJournal, len(mark))
	}
	j.last = point{binary.LittleEndian.Uint64(mark), binary.LittleEndian.Uint64(mark[8:]),
		int64(binary.LittleEndian.Uint64(mark[16:])), binary.LittleEndian.Uint64(mark[24:])}
	if j.last.trainings == 0 { // there is nothing to go on with
		file.Clear()
		return j, nil
	}
	j.resumed = true
	if err := j.compare(); err != nil {
		return nil, err
	}
	return j, nil
}

// Taken tells what the next sweep with this journal need not do again: trainings, and the rows read until then.
func (j *Journal) Taken() (trainings int, rows int64) { return int(j.last.trainings), j.last.rows }

// compare holds the journal's conditions against those of now.
func (j *Journal) compare() error {
	r := &recordReader{from: j.file.Stream(streamConditions)}
	var was []Condition
	for n := r.u32(); n > 0 && r.err == nil; n-- {
		was = append(was, Condition{r.text(), r.text()})
	}
	if r.err != nil {
		return fmt.Errorf("%w: its conditions can't be read", ErrForeignJournal)
	}
	find := func(list []Condition, name string) string {
		for _, c := range list {
			if c.Name == name {
				return c.Value
			}
		}
		return ""
	}
	for _, c := range j.conditions {
		if v := find(was, c.Name); v != c.Value {
			return &OtherError{c.Name, v, c.Value}
		}
	}
	for _, c := range was {
		if v := find(j.conditions, c.Name); v != c.Value {
			return &OtherError{c.Name, c.Value, v}
		}
	}
	return nil
}

// begin writes the conditions of a new journal.
func (j *Journal) begin() error {
	if j.resumed {
		return nil
	}
	b := binary.LittleEndian.AppendUint32(nil, uint32(len(j.conditions)))
	for _, c := range j.conditions {
		b = appendText(appendText(b, c.Name), c.Value)
	}
	if err := j.file.Write(streamConditions, b); err != nil {
		return err
	}
	return j.mark(point{})
}

func (j *Journal) mark(p point) error {
	var b []byte
	for _, v := range []uint64{p.trainings, p.snapshots, uint64(p.rows), p.next} {
		b = binary.LittleEndian.AppendUint64(b, v)
	}
	if err := j.file.Mark(b); err != nil {
		return err
	}
	j.last = p
	return nil
}

func appendText[T string | []byte](b []byte, s T) []byte {
	b = binary.LittleEndian.AppendUint32(b, uint32(len(s)))
	return append(b, s...)
}

// recordReader reads values of a stream; after the first error it gives zeros.
type recordReader struct {
	from io.Reader
	buf  [8]byte
	err  error
}

func (r *recordReader) bytes(n int) []byte {
	b := r.buf[:n]
	if r.err == nil {
		_, r.err = io.ReadFull(r.from, b)
	}
	if r.err != nil {
		clear(b)
	}
	return b
}

func (r *recordReader) u8() byte    { return r.bytes(1)[0] }
func (r *recordReader) u32() uint32 { return binary.LittleEndian.Uint32(r.bytes(4)) }
func (r *recordReader) u64() uint64 { return binary.LittleEndian.Uint64(r.bytes(8)) }

// text reads one whose memory grows with the bytes there are.
func (r *recordReader) text() string {
	n := r.u32()
	var b bytes.Buffer
	if r.err == nil {
		_, r.err = io.CopyN(&b, r.from, int64(n))
	}
	return b.String()
}
