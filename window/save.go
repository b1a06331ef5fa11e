package window

import (
	"bufio"
	"encoding/binary"
	"hash"
	"hash/crc32"
	"io"
	"math"

	"labelweir/model"
)

// The saved form. Integers are little-endian; uN is unsigned, iN signed, N bits; a text is u32 length and its bytes; a
// list is u32 count and its entries; f64 is IEEE 754.
//
//	bytes  field
//	8      "LWWINDOW"
//	2      u16 version, 1
//	37     policy: u64 records, i64 span in ns, u64 bytes, u8 keep, u32 floor, u64 seed
//	40     state: i64 last row number, i64 arrived, i64 late, i64 ahead, u64 limit
//	8      u64 next: the stored rows at which the sample is thinned
//	528    clock: i64 now, i64 timed rows, 64 × i64 recent times
//	2      u8 some table had sources, u8 the columns are known
//	       list of classes: text, u8 whether a row of it has arrived
//	       list of sources: text
//	       list of columns: text name, u8 kind, u32 size, list of levels: text
//	4      u32 CRC-32C (Castagnoli) of all bytes before it, so that no damaged size is believed
//	       blocks, oldest first, each:
//	4        u32 n, 1 to 1024 rows; n = 0 ends the list
//	8n       i64 row numbers, rising
//	8n       i64 times
//	8n       u64 keys
//	4n       i32 labels
//	4n       i32 sources
//	         each column: number and vector n·size f64, category n i32
//	4      u32 CRC-32C of all bytes before it
const (
	magic   = "LWWINDOW"
	version = 1
)

// WriteTo saves the window. What Read makes of it goes on as this one would have. The number of bytes written is
// returned, and the writer's error as it is.
func (w *Window) WriteTo(to io.Writer) (int64, error) {
	count := &counter{to: to}
	e := &encoder{w: bufio.NewWriterSize(count, 1<<16), sum: crc32.New(crc32.MakeTable(crc32.Castagnoli))}
	e.bytes([]byte(magic))
	e.u16(version)
	w.writeHead(e)
	w.writeNames(e)
	e.u32(e.sum.Sum32())
	for i, b := range w.blocks {
		from := 0
		if i == 0 {
			from = w.head
		}
		if from < len(b.rows) {
			w.writeBlock(e, b, from)
		}
	}
	e.u32(0)
	e.u32(e.sum.Sum32())
	if e.err == nil {
		e.err = e.w.Flush()
	}
	return count.n, e.err
}

func (w *Window) writeHead(e *encoder) {
	p := w.policy
	e.u64(uint64(p.Records))
	e.u64(uint64(p.Span))
	e.u64(uint64(p.Bytes))
	e.u8(byte(p.Keep))
	e.u32(uint32(p.Floor))
	e.u64(p.Seed)
	for _, v := range []int64{w.last, w.arrived, w.late, w.ahead, int64(w.limit), int64(w.next), w.clock.now, w.clock.seen} {
		e.u64(uint64(v))
	}
	for _, t := range w.clock.recent {
		e.u64(uint64(t))
	}
	e.flag(w.sourced)
	e.flag(w.columns != nil)
}

func (w *Window) writeNames(e *encoder) {
	e.u32(uint32(len(w.classes.list)))
	for i, s := range w.classes.list {
		e.text(s)
		e.flag(i < len(w.seen) && w.seen[i])
	}
	e.texts(w.sources.list)
	e.u32(uint32(len(w.columns)))
	for i, c := range w.columns {
		e.text(c.Name)
		e.u8(byte(c.Kind))
		e.u32(uint32(c.Size))
		e.texts(w.levels[i].list)
	}
}

func (w *Window) writeBlock(e *encoder, b *block, from int) {
	e.u32(uint32(len(b.rows) - from))
	for _, v := range b.rows[from:] {
		e.u64(uint64(v))
	}
	for _, v := range b.times[from:] {
		e.u64(uint64(v))
	}
	for _, v := range b.keys[from:] {
		e.u64(v)
	}
	for _, list := range [][]int32{b.labels[from:], b.sources[from:]} {
		e.codes(list)
	}
	for c := range w.columns {
		if w.columns[c].Kind == model.Category {
			e.codes(b.codes[c][from:])
			continue
		}
		for _, v := range b.values[c][from*w.columns[c].Size:] {
			e.u64(math.Float64bits(v))
		}
	}
}

// encoder writes little-endian values and sums them; after the first error it writes nothing more.
type encoder struct {
	w   *bufio.Writer
	sum hash.Hash32
	buf [8]byte
	err error
}

func (e *encoder) bytes(b []byte) {
	if e.err != nil {
		return
	}
	e.sum.Write(b) // never fails
	_, e.err = e.w.Write(b)
}

func (e *encoder) u8(v byte)    { e.buf[0] = v; e.bytes(e.buf[:1]) }
func (e *encoder) u16(v uint16) { e.bytes(binary.LittleEndian.AppendUint16(e.buf[:0], v)) }
func (e *encoder) u32(v uint32) { e.bytes(binary.LittleEndian.AppendUint32(e.buf[:0], v)) }
func (e *encoder) u64(v uint64) { e.bytes(binary.LittleEndian.AppendUint64(e.buf[:0], v)) }

func (e *encoder) flag(v bool) {
	if v {
		e.u8(1)
	} else {
		e.u8(0)
	}
}

func (e *encoder) text(s string) {
	e.u32(uint32(len(s)))
	e.bytes([]byte(s))
}

func (e *encoder) texts(list []string) {
	e.u32(uint32(len(list)))
	for _, s := range list {
		e.text(s)
	}
}

func (e *encoder) codes(list []int32) {
	for _, v := range list {
		e.u32(uint32(v))
	}
}

// counter counts the bytes that went through.
type counter struct {
	to io.Writer
	n  int64
}

func (c *counter) Write(p []byte) (int, error) {
	n, err := c.to.Write(p)
	c.n += int64(n)
	return n, err
}
