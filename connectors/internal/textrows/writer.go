package textrows

import (
	"io"

	"github.com/apache/arrow/go/v16/arrow"
	"github.com/apache/arrow/go/v16/arrow/array"

	"labelweir/connectors/internal/spell"
	"labelweir/connectors/table"
)

// Composer puts rows together.
type Composer interface {
	// Speller gives what writes the values of column i.
	Speller(i int, arr arrow.Array) (spell.Speller, error)
	// Head tells how many of a row's bytes, which the hidden column kept, are its beginning as it is to be written.
	Head(kept []byte) int
	// AppendRest appends what comes behind the head of row i, its line's end included. kept is nil when the hidden column
	// has nothing of the row, and head 0; there is a speller for each column but the hidden one.
	AppendRest(dst, kept []byte, head int, spellers []spell.Speller, i int) []byte
}

// FlushBytes is how many bytes are collected before they are written.
const FlushBytes = 256 << 10

// Writer implements table.Writer.
type Writer struct {
	w        io.Writer
	composer Composer
	raw      int             // index of the hidden column, −1 when there is none
	spellers []spell.Speller // one a column, for the record batch at hand
	buf      []byte
	err      error // sticky
}

// NewWriter writes rows of a schema behind what is to stand at the file's beginning.
func NewWriter(w io.Writer, c Composer, schema *arrow.Schema, beginning []byte) *Writer {
	return &Writer{w: w, composer: c, raw: table.RawIndex(schema), buf: beginning}
}

// Write implements table.Writer.
func (w *Writer) Write(rec arrow.Record) error {
	if w.err == nil {
		w.err = w.write(rec)
	}
	return w.err
}

func (w *Writer) write(rec arrow.Record) (err error) {
	w.spellers = append(w.spellers[:0], make([]spell.Speller, rec.NumCols())...)
	var raws *array.Binary
	for i, arr := range rec.Columns() {
		if i == w.raw {
			raws = arr.(*array.Binary)
		} else if w.spellers[i], err = w.composer.Speller(i, arr); err != nil {
			return err
		}
	}
	for i := range int(rec.NumRows()) {
		var kept []byte
		head := 0
		if raws != nil && raws.IsValid(i) {
			kept = raws.Value(i)
			head = w.composer.Head(kept)
			if err := w.append(kept[:head]); err != nil {
				return err
			}
		}
		w.buf = w.composer.AppendRest(w.buf, kept, head, w.spellers, i)
		if len(w.buf) >= FlushBytes {
			if err := w.flush(); err != nil {
				return err
			}
		}
	}
	return nil
}

// append takes the beginning of a row; a very long one is not copied but written at once.
func (w *Writer) append(head []byte) error {
	if len(head) < FlushBytes {
		w.buf = append(w.buf, head...)
		return nil
	}
	if err := w.flush(); err != nil {
		return err
	}
	_, err := w.w.Write(head)
	return err
}

func (w *Writer) flush() error {
	_, err := w.w.Write(w.buf)
	if w.buf = w.buf[:0]; cap(w.buf) > 16*FlushBytes { // after a very long row
		w.buf = nil
	}
	return err
}

// Close implements table.Writer.
func (w *Writer) Close() error {
	if w.err == nil {
		w.err = w.flush()
	}
	return w.err
}

var _ table.Writer = (*Writer)(nil)
