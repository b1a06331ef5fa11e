package arrowfile

import (
	"errors"
	"io"

	"github.com/apache/arrow/go/v16/arrow"
	"github.com/apache/arrow/go/v16/arrow/array"
	"github.com/apache/arrow/go/v16/arrow/ipc"
	"github.com/apache/arrow/go/v16/arrow/memory"

	"labelweir/connectors/table"
)

// manner is what an output takes over from its input beside the schema.
type manner struct {
	codec  Codec
	footer []string // metadata of the footer, keys and values in turn
}

// writer writes record batches with arrow's writer. Buffers are compressed as the input's are, and stand in this
// machine's byte order. Metadata of single record batches is not kept: arrow/go v16 does not read it.
type writer struct {
	wr   *ipc.Writer
	mute *mute
	bad  bool
	mem  memory.Allocator

	growers map[int]*grower // of a file, by the dictionary's column; nil for a stream

	dicts []arrow.ArrayData // of the record batch written last
}

func newWriter(w io.Writer, format Format, schema *arrow.Schema, opt table.WriteOptions) *writer {
	how, _ := opt.Manner.(manner)
	opts := []ipc.Option{ipc.WithSchema(schema), ipc.WithAllocator(opt.Memory)}
	switch how.codec {
	case LZ4:
		opts = append(opts, ipc.WithLZ4())
	case Zstd:
		opts = append(opts, ipc.WithZstd())
	}
	out := &writer{mute: &mute{w: w}, mem: opt.Memory}
	if format == File {
		opts = append(opts, ipc.WithDictionaryDeltas(true))
		out.growers = map[int]*grower{}
	}
	out.wr = ipc.NewWriterWithPayloadWriter(&payloads{w: out.mute, format: format, meta: how.footer}, opts...)
	return out
}

var errBlurredDictionary = errors.New("a dictionary of floating-point numbers is replaced by one that differs by less than 0.00001, " +
	"which can't be written; decode the column before sweeping")

// Write implements table.Writer.
func (w *writer) Write(rec arrow.Record) error {
	w.bad = true // unless all goes well
	if w.growers != nil {
		var err error
		if rec, err = w.growing(rec); err != nil {
			return err
		}
		defer rec.Release()
	}
	next := table.Dictionaries(rec)
	if blurred(w.dicts, next) {
		return errBlurredDictionary
	}
	if err := w.wr.Write(rec); err != nil {
		return err
	}
	w.bad = false
	for _, d := range next {
		d.Retain()
	}
	w.forget()
	w.dicts = next
	return nil
}

// Close implements table.Writer.
func (w *writer) Close() error {
	w.forget()
	for _, g := range w.growers {
		g.release()
	}
	w.growers = nil
	if w.bad {
		w.mute.off = true // arrow's writer gives its dictionaries back in Close only
	}
	return w.wr.Close()
}

func (w *writer) forget() {
	for _, d := range w.dicts {
		d.Release()
	}
	w.dicts = nil
}

// mute passes bytes on until it is off.
type mute struct {
	w   io.Writer
	off bool
}

func (m *mute) Write(b []byte) (int, error) {
	if m.off {
		return len(b), nil
	}
	return m.w.Write(b)
}

// blurred tells whether a dictionary differs from the one before by so little that arrow's writer would take them for
// the same.
func blurred(a, b []arrow.ArrayData) bool {
	for i := range a {
		if a[i] == b[i] {
			continue
		}
		x, y := array.MakeFromData(a[i]), array.MakeFromData(b[i])
		nan := array.WithNaNsEqual(true)
		same := !array.ApproxEqual(x, y, nan, array.WithAbsTolerance(0)) && array.ApproxEqual(x, y, nan)
		x.Release()
		y.Release()
		if same {
			return true
		}
	}
	return false
}
