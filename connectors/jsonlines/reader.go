package jsonlines

import (
	"io"
	"slices"

	"github.com/apache/arrow/go/v16/arrow"
	"github.com/apache/arrow/go/v16/arrow/array"

	"labelweir/connectors/internal/column"
	"labelweir/connectors/jsonlines/internal/scan"
	"labelweir/connectors/table"
)

// A record batch is full, however few lines it has, when its lines have so many bytes or its columns so many values:
// absent values take room in memory too.
const (
	batchBytes  = 16 << 20
	batchValues = 4 << 20
)

// reader implements table.Reader.
type reader struct {
	lines  *lines
	opt    table.ReadOptions
	size   int64
	manner manner
	schema *arrow.Schema

	finder *finder
	cells  []cells
	raw    column.Text
	place  table.Place
	err    error // sticky
}

func newReader(f table.File, opt table.ReadOptions) (*reader, error) {
	r := &reader{opt: opt, size: f.Size, lines: newLines(f, opt.MostRow), place: table.Place{Path: f.Path}}
	begin, err := r.begin(f)
	if err != nil {
		return nil, err
	}
	var c *columns
	if opt.Like != nil {
		c = likeColumns(opt.Like)
	} else if c, err = infer(r.lines, opt.Peek); err != nil {
		return nil, err
	}
	r.lines = newLines(f, opt.MostRow)
	r.lines.feed.Restart(begin)
	r.schema, r.finder = c.schema(), newFinder(c)
	r.cells = make([]cells, len(c.names))
	width := 1
	for i, dt := range c.types {
		r.cells[i] = newCells(c.names[i], dt, slices.Contains(opt.Text, c.names[i]))
		width += max(1, r.cells[i].vectors.Size)
	}
	r.opt.Rows = min(opt.Rows, max(1, batchValues/width))
	return r, nil
}

// begin passes a byte order mark.
func (r *reader) begin(f table.File) (offset int64, err error) {
	head := make([]byte, len(byteOrderMark))
	n, err := f.ReadAt(head, 0)
	if err != nil && err != io.EOF {
		return 0, r.lines.fault("can't be read", "", err)
	}
	switch {
	case string(head[:n]) == byteOrderMark:
		r.manner.mark = byteOrderMark
	case n >= 2 && (string(head[:2]) == "\xff\xfe" || string(head[:2]) == "\xfe\xff"):
		return 0, r.lines.fault("is UTF-16 text, not UTF-8", "convert it to UTF-8 first", nil)
	case n >= 2 && string(head[:2]) == "\x1f\x8b":
		return 0, r.lines.fault("is compressed by gzip", "unpack it first", nil)
	}
	r.lines.feed.Restart(int64(len(r.manner.mark)))
	return int64(len(r.manner.mark)), nil
}

// Schema implements table.Reader.
func (r *reader) Schema() *arrow.Schema { return r.schema }

// Manner implements table.Manner.
func (r *reader) Manner() any { return r.manner }

// Place implements table.Reader.
func (r *reader) Place() table.Place { return r.place }

// Progress implements table.Reader.
func (r *reader) Progress() (done, size int64) { return r.lines.feed.Offset(), r.size }

// Close implements table.Reader.
func (r *reader) Close() error { return nil }

// Next implements table.Reader.
func (r *reader) Next() (arrow.Record, error) {
	if r.err != nil {
		return nil, r.err
	}
	n, err := r.fill()
	if err == nil && n == 0 {
		err = io.EOF
	}
	if err != nil {
		r.err = err
		return nil, err
	}
	return r.take(n), nil
}

// fill collects lines for a record batch.
func (r *reader) fill() (n int, err error) {
	r.place.Line = r.lines.line + 1
	r.opt.Tell(r.place, "")
	for size := 0; n < r.opt.Rows && size < batchBytes; {
		ok, err := r.lines.next()
		if !ok || err != nil {
			return n, err
		}
		if r.lines.reason == "" {
			r.lines.reason = r.add(n)
		}
		if r.lines.reason != "" {
			if err := r.setAside(); err != nil {
				return n, err
			}
			continue
		}
		if n == 0 {
			r.place.Line = r.lines.line
		}
		size += len(r.lines.text)
		n++
	}
	return n, nil
}

// setAside passes a line that can't be read on.
func (r *reader) setAside() error {
	u := r.lines.unreadable()
	if r.opt.Unreadable == nil {
		r.place.Line = u.Line
		return r.lines.fault("the line can't be read: "+u.Reason, "mend the line, or name an output for unreadable rows", nil)
	}
	return r.opt.Unreadable(u)
}

// add takes the line's members as row n; when it can't, it gives the reason and has taken none.
func (r *reader) add(n int) (reason string) {
	line, members := r.lines.text, r.lines.scan.Members
	if reason = r.finder.find(line, members); reason != "" {
		return reason
	}
	for c := range r.cells {
		if m := r.finder.found[c]; m < 0 || members[m].Kind == scan.Null {
			r.cells[c].appendNull()
		} else if reason = r.cells[c].append(line, members[m]); reason != "" {
			for k := range r.cells {
				r.cells[k].cut(n)
			}
			return reason
		}
	}
	r.raw.Append(line)
	return ""
}

// take makes the record batch of what was collected.
func (r *reader) take(n int) arrow.Record {
	arrs := make([]arrow.Array, 0, len(r.cells)+1)
	for i := range r.cells {
		arrs = append(arrs, r.cells[i].take(r.opt))
	}
	arrs = append(arrs, r.raw.Take(arrow.BinaryTypes.Binary, r.opt.Memory))
	rec := array.NewRecord(r.schema, arrs, int64(n))
	for _, a := range arrs {
		a.Release()
	}
	return rec
}

var (
	_ table.Reader = (*reader)(nil)
	_ table.Manner = (*reader)(nil)
)
