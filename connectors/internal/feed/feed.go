// Package feed holds the part of a file that a row splitter looks at now: a window of bytes that grows until a row fits.
package feed

import (
	"errors"
	"io"
)

// ErrTooLong is what More gives when the window holds as many bytes as it may.
var ErrTooLong = errors.New("the row is too long")

// first is the size of the buffer at the start, in bytes. It doubles while a row does not fit.
const first = 256 << 10

// Feed is a window that moves through a file from its start to its end. It belongs to one goroutine.
type Feed struct {
	from   io.ReaderAt
	size   int64 // bytes of the file
	most   int   // bytes the window may hold
	buf    []byte
	lo, hi int   // buf[lo:hi] is the window
	at     int64 // offset in the file of buf[hi]
}

// New gives a feed of the first size bytes of a file, whose window never holds more than most bytes, above 0.
func New(from io.ReaderAt, size int64, most int) *Feed {
	return &Feed{from: from, size: size, most: most}
}

// Window is the bytes read and not yet skipped. They are valid until the next More or Restart.
func (f *Feed) Window() []byte { return f.buf[f.lo:f.hi] }

// Offset is where the window begins in the file.
func (f *Feed) Offset() int64 { return f.at - int64(f.hi-f.lo) }

// Ended tells whether the window reaches to the end of the file.
func (f *Feed) Ended() bool { return f.at == f.size }

// Skip takes n bytes off the window's front; n is at most its length.
func (f *Feed) Skip(n int) { f.lo += n }

// Restart empties the window and puts it at an offset.
func (f *Feed) Restart(offset int64) { f.lo, f.hi, f.at = 0, 0, offset }

// More makes the window longer by reading on, and must not be called when it has Ended. It gives ErrTooLong when the
// window may not grow, io.ErrUnexpectedEOF when the file has become shorter than it was, or the file's own error.
func (f *Feed) More() error {
	if f.hi-f.lo >= f.most {
		return ErrTooLong
	}
	f.makeRoom()
	n := int(min(int64(len(f.buf)-f.hi), f.size-f.at, int64(f.most-(f.hi-f.lo))))
	k, err := f.from.ReadAt(f.buf[f.hi:f.hi+n], f.at)
	f.hi, f.at = f.hi+k, f.at+int64(k)
	switch {
	case k == n:
		return nil
	case err == io.EOF:
		return io.ErrUnexpectedEOF
	}
	return err
}

// Trim gives back the memory that a very long row took, once it is skipped.
func (f *Feed) Trim() {
	if have := f.hi - f.lo; len(f.buf) > 16*first && have < len(f.buf)/4 {
		to := make([]byte, max(first, have))
		copy(to, f.buf[f.lo:f.hi])
		f.buf, f.lo, f.hi = to, 0, have
	}
}

// makeRoom moves the window to the buffer's front. It doubles the buffer when that is more than half full.
func (f *Feed) makeRoom() {
	have := f.hi - f.lo
	if len(f.buf) == 0 {
		f.buf = make([]byte, min(int64(first), max(f.size, 1)))
	}
	to := f.buf
	if have > len(f.buf)/2 && len(f.buf) < f.most {
		to = make([]byte, min(2*len(f.buf), f.most))
	}
	copy(to, f.buf[f.lo:f.hi])
	f.buf, f.lo, f.hi = to, 0, have
}
