package arrowfile

import (
	"errors"
	"fmt"
	"io"

	"github.com/apache/arrow/go/v16/arrow"
	"github.com/apache/arrow/go/v16/arrow/ipc"

	"labelweir/connectors/internal/capped"
	"labelweir/connectors/table"
)

// reader reads an open file, one record batch after the other. It implements table.Reader.
type reader struct {
	path string
	opt  table.ReadOptions
	msgs *messages
	rd   *ipc.Reader

	dicts, lastDicts map[arrow.ArrayData]bool // dictionaries of this record batch and the one before: checked already
}

// newReader reads the schema of a file.
func newReader(f table.File, opt table.ReadOptions) (r *reader, err error) {
	r = &reader{path: f.Path, opt: opt}
	if r.msgs, err = newMessages(f, f.Size); err != nil {
		if errors.Is(err, errNotArrow) {
			return nil, &table.Error{Path: f.Path, What: "is neither an Arrow IPC file nor an Arrow IPC stream",
				Do: "check that the path is the right one", Kind: table.ErrUnreadable}
		}
		return nil, r.damaged("its layout can't be read", err)
	}
	r.msgs.most = opt.MostBatch
	if r.rd, err = ipc.NewReaderFromMessageReader(r.msgs, ipc.WithAllocator(capped.New(opt.Memory, f.Size))); err != nil {
		r.msgs.Release()
		return nil, r.damaged("its schema can't be read", err)
	}
	return r, nil
}

func (r *reader) damaged(what string, err error) error {
	return table.At(r.Place(), table.ErrUnreadable, what, "the file is damaged or cut short: write it again", table.Plain(err))
}

// Schema implements table.Reader.
func (r *reader) Schema() *arrow.Schema { return r.rd.Schema() }

// Place implements table.Reader.
func (r *reader) Place() table.Place {
	p := table.Place{Path: r.path}
	if r.rd != nil { // before there is a schema, there is no record batch
		p.Batch = r.msgs.at
	}
	return p
}

// Progress implements table.Reader.
func (r *reader) Progress() (done, size int64) { return r.msgs.seen, r.msgs.size }

// Manner implements table.Manner: how the first record batch is compressed stands for all; damaged bytes count as not.
func (r *reader) Manner() any {
	how := manner{footer: r.msgs.footer}
	func() {
		defer func() { _ = recover() }()
		how.codec = r.msgs.firstCodec()
	}()
	return how
}

// Next implements table.Reader.
func (r *reader) Next() (rec arrow.Record, err error) {
	defer func() {
		if p := recover(); p != nil {
			rec, err = nil, r.damaged("its bytes make no sense", table.Caught(p))
		}
	}()
	r.opt.Tell(table.Place{Path: r.path, Batch: r.msgs.batch + 1}, "")
	if !r.rd.Next() {
		if err := r.rd.Err(); err != nil {
			e := r.damaged("the record batch can't be read", err).(*table.Error)
			e.Column = r.blame(err)
			if large := (*tooLarge)(nil); errors.As(err, &large) {
				e.Do = "the file is damaged, or wants smaller record batches or a higher limit of memory"
			}
			return nil, e
		}
		if n := r.msgs.missing(); n > 0 {
			return nil, r.damaged(fmt.Sprintf("%d record batches are missing", n), io.ErrUnexpectedEOF)
		}
		return nil, io.EOF
	}
	rec = r.rd.Record()
	if err := r.validate(rec); err != nil {
		return nil, err
	}
	rec.Retain()
	return rec, nil
}

// Close implements table.Reader.
func (r *reader) Close() error {
	r.rd.Release()
	r.msgs.body = nil
	return nil
}
