package arrowfile

import (
	"bufio"
	"errors"

	"github.com/apache/arrow/go/v16/arrow"
	"github.com/apache/arrow/go/v16/arrow/array"
	"github.com/apache/arrow/go/v16/arrow/ipc"

	"labelweir/filter"
)

// Record batches written have blockRows rows, fewer when these take more than blockBytes and at the end, so that the
// output does not depend on how the input was cut.
const (
	blockRows  = 16384
	blockBytes = 32 << 20
)

// output is one file being written: rows gather in pieces until they make a record batch.
type output struct {
	target *target
	format Format
	footer []string // metadata
	schema *arrow.Schema
	opt    Options
	codec  Codec

	pieces     []arrow.Record
	rows, bits int64
	dicts      []arrow.ArrayData // of the pieces, or of what was written last
	last       arrow.Record      // keeps dicts alive
	tags       *tagColumns

	buf     *bufio.Writer
	wr      *ipc.Writer // made at first use
	written int64       // rows
}

var errBlurredDictionary = errors.New("a dictionary of floating-point numbers is replaced by one that differs by less than 0.00001, " +
	"which can't be written; decode the column before sweeping")

func newOutput(t *target, src *Source, schema *arrow.Schema, opt Options) *output {
	o := &output{target: t, schema: schema, opt: opt, format: src.Format(), footer: src.in.msgs.footer, codec: src.codec(), tags: newTagColumns(opt.mem)}
	o.buf = bufio.NewWriterSize(t.file, 1<<18)
	return o
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
	piece, err := pick(rec, runs, o.opt.mem)
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

// addPiece adds rows to the block, and writes it each time it is full.
func (o *output) addPiece(piece arrow.Record, tags []filter.Tag) error {
	if err := o.follow(piece); err != nil {
		return err
	}
	for at := int64(0); at < piece.NumRows(); {
		rest := piece.NewSlice(at, min(at+o.opt.blockRows-o.rows, piece.NumRows()))
		n := fitting(rest, 8*o.opt.blockBytes-o.bits)
		if o.rows > 0 && n == 1 && sizeOfRecord(rest, 1) > 8*o.opt.blockBytes-o.bits {
			n = 0 // the block is full
		}
		if n > 0 {
			if o.rows == 0 {
				o.tags.reserve(int(o.opt.blockRows)) // all at once: lengths of bitmaps written depend on the room there is
			}
			o.keep(rest.NewSlice(0, n))
			for i := range n {
				o.tags.add(&tags[at+i])
			}
		}
		full := o.rows == o.opt.blockRows || n < rest.NumRows()
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
	next := dictionaries(piece)
	change := otherDicts
	if o.last != nil {
		change = compareDicts(o.dicts, next)
	}
	if change == sameDicts {
		return nil
	}
	if change == blurDicts {
		return errBlurredDictionary
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
	rec, err := gather(o.pieces, o.opt.mem)
	if err != nil {
		return err
	}
	defer rec.Release()
	tags := o.tags.take()
	cols := append(append([]arrow.Array(nil), rec.Columns()...), tags...)
	full := array.NewRecord(o.schema, cols, o.rows)
	defer full.Release()
	for _, t := range tags {
		t.Release()
	}
	if err := o.writer().Write(full); err != nil {
		return err
	}
	o.written += o.rows
	o.forget()
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

// writer makes arrow's writer at first use.
func (o *output) writer() *ipc.Writer {
	if o.wr == nil {
		opts := []ipc.Option{ipc.WithSchema(o.schema), ipc.WithAllocator(o.opt.mem)}
		switch o.codec {
		case LZ4:
			opts = append(opts, ipc.WithLZ4())
		case Zstd:
			opts = append(opts, ipc.WithZstd())
		}
		o.wr = ipc.NewWriterWithPayloadWriter(&payloads{w: o.buf, format: o.format, meta: o.footer}, opts...)
	}
	return o.wr
}

// finish writes what is left and the end of the file, down to the disk.
func (o *output) finish() error {
	if err := o.flush(); err != nil {
		return err
	}
	if err := o.writer().Close(); err != nil {
		return err
	}
	o.wr = nil
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
	if o.wr != nil { // it gives its dictionaries back in Close only
		o.buf.Reset(discard{})
		_ = o.wr.Close()
		o.wr = nil
	}
	o.tags.release()
}

// discard takes what must not reach the file any more.
type discard struct{}

func (discard) Write(b []byte) (int, error) { return len(b), nil }
