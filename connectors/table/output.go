package table

import (
	"bufio"
	"slices"

	"github.com/apache/arrow/go/v16/arrow"
	"github.com/apache/arrow/go/v16/arrow/array"

	"labelweir/filter"
)

// output is one file being written: rows gather in pieces until they make a record batch of Options.BlockRows rows,
// fewer when these take more than Options.BlockBytes and at the end, so that it does not depend on how the input was cut.
// Formats for which that makes no difference get the pieces as they come.
type output struct {
	target *Target
	format *Format
	conv   *conversion   // nil: rows are written as they are
	schema *arrow.Schema // with the tags
	opt    Options

	pieces     []arrow.Record
	rows, bits int64
	dicts      []arrow.ArrayData // of the pieces, or of what was written last
	last       arrow.Record      // keeps dicts alive
	tags       *tagColumns

	buf     *bufio.Writer
	wr      Writer
	written int64 // rows
}

// newOutput begins a file; when it fails, the target is still to be dropped.
func newOutput(t *Target, src *Source, opt Options) (*output, error) {
	o := &output{target: t, opt: opt, tags: newTagColumns(opt.Memory), buf: bufio.NewWriterSize(t.file, 1<<18)}
	var err error
	if o.format, err = outFormat(t.path, src.in.format, opt); err != nil {
		return o, err
	}
	if t.pipe && !o.format.Pipe {
		return o, &Error{Path: t.path, What: o.format.Title + " can't be written into a pipe", Do: "name another format for the output, or a file", Kind: ErrTarget}
	}
	if o.conv, err = newConversion(src, o.format); err != nil {
		return o, err
	}
	base := src.in.schema
	if o.conv != nil {
		base = o.conv.schema
	}
	meta := base.Metadata()
	o.schema = arrow.NewSchema(append(slices.Clone(base.Fields()), tagFields()...), &meta)
	how := WriteOptions{Memory: opt.Memory}
	if !t.pipe {
		how.Name = t.path
	}
	if o.format.Name == src.in.format.Name {
		how.Manner = src.in.manner()
	}
	return o, fenced(o, func() error {
		o.wr, err = o.format.Create(o.buf, o.schema, how)
		return err
	})
}

// add takes the given runs of rec with their tags.
func (o *output) add(rec arrow.Record, runs []run, tags []filter.Tag) error {
	if len(runs) == 0 {
		return nil
	}
	if len(runs) == 1 && runs[0].hi-runs[0].lo == rec.NumRows() {
		return o.addPiece(rec, tags)
	}
	// A few rows must not hold all of their record batch in memory, so they are copied.
	piece, err := pick(rec, runs, o.opt.Memory)
	if err != nil {
		return err
	}
	defer piece.Release()
	kept := make([]filter.Tag, 0, piece.NumRows())
	for _, r := range runs {
		kept = append(kept, tags[r.lo:r.hi]...)
	}
	return o.addPiece(piece, kept)
}

// addPiece writes rows, or adds them to the block, which it writes each time it is full.
func (o *output) addPiece(piece arrow.Record, tags []filter.Tag) error {
	if o.conv != nil {
		piece = o.conv.bare(piece)
		defer piece.Release()
	}
	if o.format.Rows {
		o.tags.reserve(len(tags))
		for i := range tags {
			o.tags.add(&tags[i])
		}
		return o.write(piece)
	}
	if err := o.follow(piece); err != nil {
		return err
	}
	for at := int64(0); at < piece.NumRows(); {
		rest := piece.NewSlice(at, min(at+o.opt.BlockRows-o.rows, piece.NumRows()))
		n := fitting(rest, 8*o.opt.BlockBytes-o.bits)
		if o.rows > 0 && n == 1 && sizeOfRecord(rest, 1) > 8*o.opt.BlockBytes-o.bits {
			n = 0 // the block is full
		}
		if n > 0 {
			if o.rows == 0 {
				o.tags.reserve(int(o.opt.BlockRows)) // all at once: lengths of bitmaps written depend on the room there is
			}
			o.keep(rest.NewSlice(0, n))
			for i := range n {
				o.tags.add(&tags[at+i])
			}
		}
		full := o.rows == o.opt.BlockRows || n < rest.NumRows()
		rest.Release()
		if at += n; full {
			if err := o.flush(); err != nil {
				return err
			}
		}
	}
	return nil
}

func (o *output) keep(piece arrow.Record) {
	o.pieces = append(o.pieces, piece)
	o.rows += piece.NumRows()
	o.bits += sizeOfRecord(piece, int(piece.NumRows()))
}

// follow ends the block when a dictionary changes, so that each block has its dictionaries as they came.
func (o *output) follow(piece arrow.Record) error {
	next := Dictionaries(piece)
	if o.last != nil && equalDicts(o.dicts, next) {
		return nil
	}
	if err := o.flush(); err != nil {
		return err
	}
	piece.Retain()
	if o.last != nil {
		o.last.Release()
	}
	o.last, o.dicts = piece, next
	return nil
}

// flush writes the block as one record batch.
func (o *output) flush() error {
	if o.rows == 0 {
		return nil
	}
	rec, err := gather(o.pieces, o.opt.Memory)
	if err != nil {
		return err
	}
	defer rec.Release()
	if err := o.write(rec); err != nil {
		return err
	}
	o.forget()
	return nil
}

// write writes a record batch with the tags collected.
func (o *output) write(rec arrow.Record) error {
	own := o.tags.take() // the columns that are no longer needed when the record batch has them
	cols := append([]arrow.Array(nil), rec.Columns()...)
	if o.conv != nil {
		cols = o.conv.apply(rec, o.opt.Memory)
		own = append(own, cols...)
	}
	full := array.NewRecord(o.schema, append(cols, own[:len(TagNames())]...), rec.NumRows())
	defer full.Release()
	for _, c := range own {
		c.Release()
	}
	if err := o.wr.Write(full); err != nil {
		return err
	}
	o.written += rec.NumRows()
	return nil
}

// forget gives the pieces back.
func (o *output) forget() {
	for _, p := range o.pieces {
		p.Release()
	}
	clear(o.pieces)
	o.pieces, o.rows, o.bits = o.pieces[:0], 0, 0
}

// finish writes what is left and the end of the file, down to the disk.
func (o *output) finish() error {
	if err := o.flush(); err != nil {
		return err
	}
	wr := o.wr
	o.wr = nil
	if err := wr.Close(); err != nil {
		return err
	}
	if err := o.buf.Flush(); err != nil {
		return err
	}
	return o.target.sync()
}

// release gives all memory back.
func (o *output) release() {
	o.forget()
	if o.last != nil {
		o.last.Release()
		o.last, o.dicts = nil, nil
	}
	if o.wr != nil { // it gives its memory back in Close only
		o.buf.Reset(discard{})
		_ = o.wr.Close()
		o.wr = nil
	}
	o.tags.release()
}

// discard takes what must not reach the file any more.
type discard struct{}

func (discard) Write(b []byte) (int, error) { return len(b), nil }
