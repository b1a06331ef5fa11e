package csv

import (
	"bytes"
	"io"

	"github.com/apache/arrow/go/v16/arrow"
	"github.com/apache/arrow/go/v16/arrow/array"

	"labelweir/connectors/internal/spell"
	"labelweir/connectors/table"
)

// writer implements table.Writer.
type writer struct {
	w      io.Writer
	manner manner
	schema *arrow.Schema
	raw    int // index of the hidden column, −1 when there is none
	need   [256]bool

	respell bool // write rows out of their cells, also when their bytes are there

	spellers []spell.Speller // one a column, for the record batch at hand
	buf      []byte
	err      error // sticky
}

// flushBytes is how many bytes are collected before they are written.
const flushBytes = 256 << 10

func create(w io.Writer, schema *arrow.Schema, opt table.WriteOptions) (table.Writer, error) {
	out := &writer{w: w, schema: schema, raw: table.RawIndex(schema), manner: manner{delimiter: ',', newline: "\n"}}
	if m, ok := opt.Manner.(manner); ok {
		out.manner = m
	}
	if isTabbed(opt.Name) && out.manner.delimiter != '\t' { // the rows' own bytes are of no use then
		out.manner = manner{delimiter: '\t', newline: out.manner.newline}
		out.respell = true
	}
	for _, c := range []byte{out.manner.delimiter, '"', '\n', '\r'} {
		out.need[c] = true
	}
	out.writeHeader()
	return out, nil
}

// writeHeader takes the input's own header where it stands for the columns before the hidden one.
func (w *writer) writeHeader() {
	from := 0
	if w.raw >= 0 && len(w.manner.header) > 0 {
		w.buf, from = append(w.buf, w.manner.header...), w.raw+1
	}
	for i, f := range w.schema.Fields()[from:] {
		if i += from; i != w.raw {
			w.separate(i)
			lo := len(w.buf)
			w.buf = append(w.buf, f.Name...)
			w.quote(lo)
		}
	}
	w.buf = append(w.buf, w.manner.newline...)
}

// Write implements table.Writer.
func (w *writer) Write(rec arrow.Record) error {
	if w.err != nil {
		return w.err
	}
	if w.err = w.prepare(rec); w.err != nil {
		return w.err
	}
	var raws *array.Binary
	if w.raw >= 0 && !w.respell {
		raws = rec.Column(w.raw).(*array.Binary)
	}
	for i := range int(rec.NumRows()) {
		w.row(raws, i)
		if len(w.buf) >= flushBytes {
			if w.err = w.flush(); w.err != nil {
				return w.err
			}
		}
	}
	return nil
}

// prepare makes the spellers of a record batch.
func (w *writer) prepare(rec arrow.Record) (err error) {
	w.spellers = append(w.spellers[:0], make([]spell.Speller, rec.NumCols())...)
	for i, arr := range rec.Columns() {
		if i == w.raw {
			continue
		}
		if b, ok := arr.(*array.Binary); ok && i < w.raw {
			w.spellers[i] = bytesOf(b)
		} else if w.spellers[i], err = spell.Plain(arr); err != nil {
			return err
		}
	}
	return nil
}

// bytesOf spells cells of a CSV file that are no UTF-8 as they came.
func bytesOf(a *array.Binary) spell.Speller {
	return func(dst []byte, i int) ([]byte, bool) { return append(dst, a.Value(i)...), a.IsNull(i) }
}

// row appends row i: its bytes as they came and the cells behind the hidden column, or all of its cells.
func (w *writer) row(raws *array.Binary, i int) {
	newline, from := w.manner.newline, 0
	if raws != nil && raws.IsValid(i) {
		b := raws.Value(i)
		if text := bytes.TrimSuffix(b, []byte("\n")); len(text) < len(b) { // a line's end of its own
			text = bytes.TrimSuffix(text, []byte("\r"))
			b, newline = text, string(b[len(text):])
		}
		w.buf, from = append(w.buf, b...), w.raw+1
	}
	for k := from; k < len(w.spellers); k++ {
		if k == w.raw {
			continue
		}
		w.separate(k)
		lo := len(w.buf)
		var null bool
		if w.buf, null = w.spellers[k](w.buf, i); !null || len(w.spellers) == 1 { // a blank line would be no row
			w.quote(lo)
		}
	}
	w.buf = append(w.buf, newline...)
}

// separate appends the delimiter in front of column i.
func (w *writer) separate(i int) {
	if i > 0 {
		w.buf = append(w.buf, w.manner.delimiter)
	}
}

// quote puts the cell at the buffer's end, from lo on, into quotes when it needs them: when it is empty, which without
// them means null, and when it holds a delimiter, a quote or a line's end.
func (w *writer) quote(lo int) {
	cell := w.buf[lo:]
	if len(cell) == 0 {
		w.buf = append(w.buf, `""`...)
		return
	}
	if !w.needsQuotes(cell) {
		return
	}
	more := 2 + bytes.Count(cell, []byte{'"'})
	for range more {
		w.buf = append(w.buf, '"')
	}
	to := len(w.buf) - 1 // the closing quote stands there
	for from := to - more; from >= lo; from-- {
		to--
		w.buf[to] = w.buf[from]
		if w.buf[from] == '"' {
			to--
			w.buf[to] = '"'
		}
	}
	w.buf[lo] = '"'
}

func (w *writer) needsQuotes(cell []byte) bool {
	for _, c := range cell {
		if w.need[c] {
			return true
		}
	}
	return false
}

func (w *writer) flush() error {
	_, err := w.w.Write(w.buf)
	if w.buf = w.buf[:0]; cap(w.buf) > 16*flushBytes { // after a very long row
		w.buf = nil
	}
	return err
}

// Close implements table.Writer.
func (w *writer) Close() error {
	if w.err != nil {
		return w.err
	}
	w.err = w.flush()
	return w.err
}

var _ table.Writer = (*writer)(nil)
