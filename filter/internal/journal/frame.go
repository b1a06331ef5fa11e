package journal

import (
	"bufio"
	"encoding/binary"
	"errors"
	"hash/crc32"
	"io"
)

const (
	magic     = "LWRESUME"
	version   = 1
	headLen   = len(magic) + 2
	frameHead = 1 + 4
	maxFrame  = 1 << 16 // bytes of a frame's content
)

// mark is the kind of frame that is a mark.
const mark = 0

// head is what a file begins with.
func head() []byte { return binary.LittleEndian.AppendUint16([]byte(magic), version) }

// table is that of CRC-32C.
func table() *crc32.Table { return crc32.MakeTable(crc32.Castagnoli) }

// appendFrame appends a frame to dst, and gives the checksum with it; sum is that of all bytes before.
func appendFrame(dst []byte, kind byte, content []byte, sum uint32) ([]byte, uint32) {
	from := len(dst)
	dst = append(dst, kind)
	dst = binary.LittleEndian.AppendUint32(dst, uint32(len(content)))
	dst = append(dst, content...)
	dst = binary.LittleEndian.AppendUint32(dst, crc32.Update(sum, table(), dst[from:]))
	return dst, crc32.Update(sum, table(), dst[from:])
}

// errDamaged ends the frames at the first that is not whole.
var errDamaged = errors.New("journal: a frame is damaged")

// frames reads frame after frame.
type frames struct {
	r   *bufio.Reader
	at  int64  // bytes read, those before the first frame counted
	sum uint32 // of these bytes
	buf []byte // the frame
}

// newFrames begins behind the head.
func newFrames(f io.ReaderAt) *frames {
	const end = 1 << 62 // of no file there is
	return &frames{r: bufio.NewReaderSize(io.NewSectionReader(f, int64(headLen), end), 1<<16),
		at: int64(headLen), sum: crc32.Update(0, table(), head())}
}

// next gives the next frame; content is valid until the call after. The error is io.EOF at the file's end, errDamaged, or
// the reader's own.
func (f *frames) next() (kind byte, content []byte, err error) {
	var start [frameHead]byte
	if err := f.fill(start[:]); err != nil {
		return 0, nil, err
	}
	n := binary.LittleEndian.Uint32(start[1:])
	if n > maxFrame {
		return 0, nil, errDamaged
	}
	if cap(f.buf) < maxFrame+4 {
		f.buf = make([]byte, maxFrame+4)
	}
	rest := f.buf[:n+4]
	if err := f.fill(rest); err != nil {
		if err == io.EOF {
			err = errDamaged
		}
		return 0, nil, err
	}
	sum := crc32.Update(crc32.Update(f.sum, table(), start[:]), table(), rest[:n])
	if binary.LittleEndian.Uint32(rest[n:]) != sum {
		return 0, nil, errDamaged
	}
	f.sum = crc32.Update(sum, table(), rest[n:])
	f.at += int64(frameHead + len(rest))
	return start[0], rest[:n], nil
}

// fill reads all of b.
func (f *frames) fill(b []byte) error {
	_, err := io.ReadFull(f.r, b)
	if err == io.ErrUnexpectedEOF {
		return errDamaged
	}
	return err
}
