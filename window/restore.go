package window

import (
	"bufio"
	"encoding/binary"
	"errors"
	"fmt"
	"hash"
	"hash/crc32"
	"io"
	"math"
	"time"

	"labelweir/model"
)

// maxText is the longest name that is read, in bytes; a longer one is taken for damage.
const maxText = 1 << 20

// Read restores a window that WriteTo saved, with the policy it had. Foreign, cut or damaged bytes give an error that
// wraps ErrDamaged and says where; an error of the reader is wrapped as it is. Memory grows with the bytes there are,
// not with the counts they claim. It may read past the window's end.
func Read(from io.Reader) (*Window, error) {
	d := &decoder{r: bufio.NewReaderSize(from, 1<<16), sum: crc32.New(crc32.MakeTable(crc32.Castagnoli))}
	if string(d.bytes(len(magic))) != magic {
		d.fault("it does not begin with %q", magic)
	}
	if v := d.u16(); v != version {
		d.fault("it is of version %d, and this program reads version %d", v, version)
	}
	w := d.head()
	columns := d.names(w)
	d.checksum()
	if columns != nil && d.err == nil {
		d.begin(w, columns)
	}
	for d.err == nil {
		n := int(d.u32())
		if n == 0 || d.err != nil {
			break
		}
		d.block(w, n)
	}
	d.checksum()
	if d.err != nil {
		return nil, d.err
	}
	return w, nil
}

// decoder reads little-endian values and sums them; after the first error it gives zeros.
type decoder struct {
	r   *bufio.Reader
	sum hash.Hash32
	at  int64
	buf [8]byte
	err error
}

// fault notes that the bytes are damaged.
func (d *decoder) fault(format string, args ...any) {
	if d.err == nil {
		d.err = fmt.Errorf("%w: byte %d: %s", ErrDamaged, d.at, fmt.Sprintf(format, args...))
	}
}

// bytes reads n of them; what it returns is valid until the next call when n ≤ 8.
func (d *decoder) bytes(n int) []byte {
	b := d.buf[:]
	if n > len(b) {
		b = make([]byte, n)
	}
	b = b[:n]
	if d.err != nil {
		clear(b)
		return b
	}
	m, err := io.ReadFull(d.r, b)
	d.at += int64(m)
	switch {
	case err == nil:
		d.sum.Write(b)
	case errors.Is(err, io.EOF) || errors.Is(err, io.ErrUnexpectedEOF):
		d.fault("it ends too early")
		clear(b)
	default:
		d.err = fmt.Errorf("window: byte %d: %w", d.at, err)
		clear(b)
	}
	return b
}

func (d *decoder) u8() byte    { return d.bytes(1)[0] }
func (d *decoder) u16() uint16 { return binary.LittleEndian.Uint16(d.bytes(2)) }
func (d *decoder) u32() uint32 { return binary.LittleEndian.Uint32(d.bytes(4)) }
func (d *decoder) u64() uint64 { return binary.LittleEndian.Uint64(d.bytes(8)) }

// count reads a number that must lie between lo and hi.
func (d *decoder) count(what string, lo, hi int64) int {
	v := int64(d.u64())
	if v < lo || v > hi {
		d.fault("%s is %d", what, v)
	}
	return int(v)
}

// checksum reads the sum of what was read so far.
func (d *decoder) checksum() {
	want := d.sum.Sum32()
	if d.u32() != want {
		d.fault("its checksum does not fit")
	}
}

func (d *decoder) flag() bool {
	v := d.u8()
	if v > 1 {
		d.fault("a flag is %d", v)
	}
	return v == 1
}

func (d *decoder) text() string {
	n := d.u32()
	if n > maxText {
		d.fault("a name of %d bytes", n)
		return ""
	}
	return string(d.bytes(int(n)))
}

func (d *decoder) texts() []string {
	var list []string
	for n := d.u32(); n > 0 && d.err == nil; n-- {
		list = append(list, d.text())
	}
	return list
}

// head reads policy, state and clock.
func (d *decoder) head() *Window {
	p := Policy{
		Records: int(d.u64()), Span: time.Duration(d.u64()), Bytes: int64(d.u64()),
		Keep: Keep(d.u8()), Floor: int(d.u32()), Seed: d.u64(),
	}
	if err := p.Validate(); err != nil {
		d.fault("%v", err)
	}
	w := &Window{policy: p}
	w.last = int64(d.u64())
	w.arrived, w.late, w.ahead = int64(d.u64()), int64(d.u64()), int64(d.u64())
	w.limit = d.count("the limit", 1, int64(max(1, p.Records)))
	w.next = d.count("the next thinning", 0, math.MaxInt64)
	w.clock.now = int64(d.u64())
	w.clock.seen = int64(d.count("the number of timed rows", 0, math.MaxInt64))
	for i := range w.clock.recent {
		w.clock.recent[i] = int64(d.u64())
	}
	w.sourced = d.flag()
	return w
}

// names reads the lists of names, and gives the columns; nil when they are not known yet.
func (d *decoder) names(w *Window) []model.Column {
	known := d.flag()
	for n := d.u32(); n > 0 && d.err == nil; n-- {
		w.classes.list = append(w.classes.list, d.text())
		seen := d.flag()
		w.seen = append(w.seen, seen)
		if seen {
			w.nSeen++
		}
	}
	w.sources.list = d.texts()
	columns := []model.Column{}
	for n := d.u32(); n > 0 && d.err == nil; n-- {
		c := model.Column{Name: d.text(), Kind: model.Kind(d.u8()), Size: int(d.u32())}
		if c.Kind < model.Number || c.Kind > model.Vector || c.Size < 1 {
			d.fault("column %q is %v of size %d", c.Name, c.Kind, c.Size)
		}
		columns = append(columns, c)
		w.levels = append(w.levels, names{list: d.texts()})
	}
	if !known {
		return nil
	}
	return columns
}

// begin gives the window its columns back.
func (d *decoder) begin(w *Window, columns []model.Column) {
	levels, limit, next := w.levels, w.limit, w.next
	w.limit = w.policy.Records
	if err := w.begin(columns); err != nil {
		d.fault("%v", err)
		return
	}
	if limit > w.limit || next > w.maxRows() {
		d.fault("a limit of %d, thinning at %d", limit, next)
	}
	w.levels, w.limit, w.next = levels, limit, next
}

// block reads n rows and appends them.
func (d *decoder) block(w *Window, n int) {
	if w.columns == nil || n > w.blockRows || w.stored+n > w.maxRows() {
		d.fault("a block of %d rows", n)
		return
	}
	in := newBlock(w.columns, n)
	in.stretch(n)
	for i := range n {
		in.rows[i] = int64(d.u64())
		if in.rows[i] > w.last || i > 0 && in.rows[i] <= in.rows[i-1] {
			d.fault("row number %d", in.rows[i])
		}
	}
	for i := range n {
		in.times[i] = int64(d.u64())
	}
	for i := range n {
		in.keys[i] = d.u64()
	}
	d.codes(in.labels, 0, len(w.classes.list), "label")
	d.codes(in.sources, -1, len(w.sources.list), "source")
	for c := range w.columns {
		if in.codes[c] != nil {
			d.codes(in.codes[c], -1, len(w.levels[c].list), "level")
			continue
		}
		for i := range in.values[c] {
			in.values[c][i] = math.Float64frombits(d.u64())
		}
	}
	for i := 0; i < n && d.err == nil; i++ {
		b := w.tail()
		b.stretch(len(b.rows) + 1)
		b.move(len(b.rows)-1, in, i)
		w.stored++
	}
}

// codes reads one code for each entry of dst; each must be at least lo and below hi.
func (d *decoder) codes(dst []int32, lo, hi int, what string) {
	for i := range dst {
		dst[i] = int32(d.u32())
		if int(dst[i]) < lo || int(dst[i]) >= hi {
			d.fault("a %s code of %d", what, dst[i])
		}
	}
}
