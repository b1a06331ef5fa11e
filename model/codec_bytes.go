package model

import (
	"encoding/binary"
	"errors"
	"fmt"
	"io"
	"math"
)

// encoder writes little-endian values through a buffer; after the first error it writes nothing more.
type encoder struct {
	w   io.Writer
	buf []byte
	err error
}

// bufferSize is how much an encoder gathers before it writes.
const bufferSize = 1 << 16

func newEncoder(w io.Writer) *encoder { return &encoder{w: w, buf: make([]byte, 0, bufferSize)} }

// room makes sure that the buffer has room for a small value.
func (e *encoder) room() {
	if len(e.buf) > bufferSize-16 {
		e.flush()
	}
}

func (e *encoder) flush() {
	if e.err == nil {
		_, e.err = e.w.Write(e.buf)
	}
	e.buf = e.buf[:0]
}

func (e *encoder) bytes(b []byte) {
	if len(b) > bufferSize-len(e.buf) {
		e.flush()
	}
	if len(b) <= bufferSize {
		e.buf = append(e.buf, b...)
	} else if e.err == nil {
		_, e.err = e.w.Write(b)
	}
}

func (e *encoder) u8(v uint8)    { e.room(); e.buf = append(e.buf, v) }
func (e *encoder) u16(v uint16)  { e.room(); e.buf = binary.LittleEndian.AppendUint16(e.buf, v) }
func (e *encoder) u32(v uint32)  { e.room(); e.buf = binary.LittleEndian.AppendUint32(e.buf, v) }
func (e *encoder) u64(v uint64)  { e.room(); e.buf = binary.LittleEndian.AppendUint64(e.buf, v) }
func (e *encoder) f32(v float32) { e.u32(math.Float32bits(v)) }
func (e *encoder) f64(v float64) { e.u64(math.Float64bits(v)) }
func (e *encoder) count(n int)   { e.u32(uint32(n)) }

func (e *encoder) flag(v bool) {
	if v {
		e.u8(1)
	} else {
		e.u8(0)
	}
}

func (e *encoder) text(s string) {
	e.count(len(s))
	e.bytes([]byte(s))
}

func (e *encoder) texts(list []string) {
	e.count(len(list))
	for _, s := range list {
		e.text(s)
	}
}

// f64s writes values without their count.
func (e *encoder) f64s(list []float64) {
	for _, v := range list {
		e.f64(v)
	}
}

// f32s writes values without their count.
func (e *encoder) f32s(list []float32) {
	for _, v := range list {
		e.f32(v)
	}
}

// counter counts the bytes that go through it to a writer, which may be nil.
type counter struct {
	to io.Writer
	n  int64
}

func (c *counter) Write(p []byte) (int, error) {
	n, err := len(p), error(nil)
	if c.to != nil {
		n, err = c.to.Write(p)
	}
	c.n += int64(n)
	return n, err
}

// decoder reads what encoder wrote; after the first fault it gives zeros and empty lists.
type decoder struct {
	b   []byte
	at  int
	err error
}

var errEnds = errors.New("it ends in the middle of a value")

func (d *decoder) fail(err error) {
	if d.err == nil {
		d.err = fmt.Errorf("payload byte %d: %w", d.at, err)
	}
}

// take is the next n bytes, or n zeros for a small n.
func (d *decoder) take(n int) []byte {
	if d.err == nil && n > len(d.b)-d.at {
		d.fail(errEnds)
	}
	if d.err != nil {
		return make([]byte, min(n, 8))
	}
	d.at += n
	return d.b[d.at-n : d.at]
}

func (d *decoder) u8() uint8    { return d.take(1)[0] }
func (d *decoder) u16() uint16  { return binary.LittleEndian.Uint16(d.take(2)) }
func (d *decoder) u32() uint32  { return binary.LittleEndian.Uint32(d.take(4)) }
func (d *decoder) u64() uint64  { return binary.LittleEndian.Uint64(d.take(8)) }
func (d *decoder) f64() float64 { return math.Float64frombits(d.u64()) }

// flag reads a byte that is 0 or 1.
func (d *decoder) flag() bool {
	v := d.u8()
	if v > 1 {
		d.fail(fmt.Errorf("%d where 0 or 1 is expected", v))
	}
	return v == 1
}

// whole reads a number of rows or the like.
func (d *decoder) whole() int {
	v := d.u64()
	if v > 1<<53 {
		d.fail(fmt.Errorf("a count of %d", v))
		return 0
	}
	return int(v)
}

// count reads the length of a list whose entries take at least size bytes each.
func (d *decoder) count(size int) int { return d.fits(int(d.u32()), size) }

// fits is n, or 0 with a fault if n entries of size bytes are more than is left.
func (d *decoder) fits(n, size int) int {
	if d.err == nil && (n < 0 || n > (len(d.b)-d.at)/size) {
		d.fail(fmt.Errorf("a list of %d entries where %d bytes are left", n, len(d.b)-d.at))
	}
	if d.err != nil {
		return 0
	}
	return n
}

// finite reads a number that is neither NaN nor infinite.
func (d *decoder) finite() float64 {
	v := d.f64()
	if v-v != 0 {
		d.fail(fmt.Errorf("%v where a finite number is expected", v))
	}
	return v
}

func (d *decoder) text() string {
	n := d.count(1)
	if n == 0 {
		return ""
	}
	return string(d.take(n))
}

func (d *decoder) texts() []string {
	n := d.count(4)
	if n == 0 {
		return nil
	}
	out := make([]string, n)
	for i := range out {
		out[i] = d.text()
	}
	return out
}

// f64s reads n finite numbers.
func (d *decoder) f64s(n int) []float64 {
	if n = d.fits(n, 8); n == 0 {
		return nil
	}
	out := make([]float64, n)
	for i := range out {
		out[i] = d.finite()
	}
	return out
}

// f32s reads n finite numbers.
func (d *decoder) f32s(n int) []float32 {
	if n = d.fits(n, 4); n == 0 {
		return nil
	}
	out := make([]float32, n)
	for i, b := 0, d.take(4*n); i < n; i++ {
		out[i] = math.Float32frombits(binary.LittleEndian.Uint32(b[4*i:]))
		if out[i]-out[i] != 0 {
			d.fail(fmt.Errorf("%v where a finite number is expected", out[i]))
			return nil
		}
	}
	return out
}
