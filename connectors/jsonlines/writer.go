package jsonlines

import (
	"bytes"
	"fmt"
	"io"

	"github.com/apache/arrow/go/v16/arrow"
	"github.com/apache/arrow/go/v16/arrow/array"

	"labelweir/connectors/internal/spell"
	"labelweir/connectors/table"
)

// writer implements table.Writer.
type writer struct {
	w     io.Writer
	names [][]byte // of each column: the name as JSON and a colon
	raw   int      // index of the hidden column, −1 when there is none

	spellers []spell.Speller // one a column, for the record batch at hand
	buf      []byte
	err      error // sticky
}

// flushBytes is how many bytes are collected before they are written.
const flushBytes = 256 << 10

func create(w io.Writer, schema *arrow.Schema, opt table.WriteOptions) (table.Writer, error) {
	out := &writer{w: w, raw: table.RawIndex(schema)}
	for _, name := range uniqueNames(schema) {
		out.names = append(out.names, append(spell.AppendString(nil, name), ':'))
	}
	if m, ok := opt.Manner.(manner); ok {
		out.buf = append(out.buf, m.mark...)
	}
	return out, nil
}

// uniqueNames gives each column a name that no other has, for members of one object must differ: its own, or with "#2",
// "#3" … when it is taken.
func uniqueNames(schema *arrow.Schema) []string {
	taken := map[string]bool{}
	for _, f := range schema.Fields() {
		taken[f.Name] = true
	}
	names, met := make([]string, schema.NumFields()), map[string]bool{}
	for i, f := range schema.Fields() {
		name := f.Name
		for k := 2; met[name] || k > 2 && taken[name]; k++ {
			name = fmt.Sprintf("%s#%d", f.Name, k)
		}
		if names[i] = name; i != table.RawIndex(schema) {
			met[name] = true
		}
	}
	return names
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
	if w.raw >= 0 {
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
		if i != w.raw {
			if w.spellers[i], err = spell.JSON(arr); err != nil {
				return err
			}
		}
	}
	return nil
}

// row appends row i: its line as it came, with the members behind the hidden column before its closing brace, or an
// object of all columns.
func (w *writer) row(raws *array.Binary, i int) {
	end, from, empty := []byte("}"), 0, true
	if raws != nil && raws.IsValid(i) {
		line := raws.Value(i)
		brace := bytes.LastIndexByte(line, '}')
		w.buf, end = append(w.buf, line[:brace]...), line[brace:]
		inside := bytes.TrimRight(line[:brace], " \t\r")
		empty = inside[len(inside)-1] == '{'
		from = w.raw + 1
	} else {
		w.buf = append(w.buf, '{')
	}
	for k := from; k < len(w.spellers); k++ {
		if k == w.raw {
			continue
		}
		if !empty {
			w.buf = append(w.buf, ',')
		}
		empty = false
		w.buf, _ = w.spellers[k](append(w.buf, w.names[k]...), i)
	}
	w.buf = append(append(w.buf, end...), '\n')
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
