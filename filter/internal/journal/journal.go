package journal

import (
	"bytes"
	"errors"
	"fmt"
	"io"
)

// File is what a journal stands in. Reading beyond the end gives io.EOF.
type File interface {
	io.ReaderAt
	io.WriterAt
	Truncate(size int64) error
	Sync() error // brings all that was written to the disk
}

// ErrForeign is a file that is no journal, or one of another version.
var ErrForeign = errors.New("not a journal that this program reads")

// Streams is how many streams a journal can have; they are numbered from 1 to Streams.
const Streams = 7

// Journal is a file of streams, of which what stands before the last mark can be read, and to which more can be written.
// It belongs to one goroutine.
type Journal struct {
	file File
	kept kept

	at    int64  // where the next frame goes
	sum   uint32 // of all bytes before
	begun bool   // frames have been written since Open
	buf   [Streams + 1][]byte
	frame []byte // scratch
}

// kept is the last mark.
type kept struct {
	end   int64 // offset behind it; 0: none
	sum   uint32
	marks int
	bytes []byte
}

// Open looks at what the file holds, and changes nothing. A file that is empty, or was left before its first mark was
// written, holds nothing. Errors: ErrForeign, and the file's as they are.
func Open(f File) (*Journal, error) {
	j := &Journal{file: f}
	begins := make([]byte, headLen)
	n, err := f.ReadAt(begins, 0)
	if err != nil && err != io.EOF {
		return nil, err
	}
	switch want := head(); {
	case n < headLen && bytes.HasPrefix(want, begins[:n]):
		return j, nil
	case n < headLen || !bytes.HasPrefix(begins, []byte(magic)):
		return nil, fmt.Errorf("%w: it begins with %q, not %q", ErrForeign, begins[:n], magic)
	case !bytes.Equal(begins, want):
		return nil, fmt.Errorf("%w: its version is not %d", ErrForeign, version)
	}
	frames := newFrames(f)
	for {
		kind, content, err := frames.next()
		switch {
		case err == io.EOF || err == errDamaged || err == nil && kind > Streams:
			return j, nil
		case err != nil:
			return nil, err
		case kind == mark:
			j.kept = kept{frames.at, frames.sum, j.kept.marks + 1, bytes.Clone(content)}
		}
	}
}

// Last gives the bytes of the last mark, and how many marks there are; 0 when the journal holds nothing.
func (j *Journal) Last() (mark []byte, marks int) { return j.kept.bytes, j.kept.marks }

// Clear has the journal hold nothing; the file is cut when something is written.
func (j *Journal) Clear() { j.kept = kept{} }

// Stream reads what a stream holds up to the last mark that was there at Open. Several may be read side by side.
func (j *Journal) Stream(number int) io.Reader {
	if j.kept.end == 0 {
		return bytes.NewReader(nil)
	}
	return &stream{frames: newFrames(j.file), kind: byte(number), end: j.kept.end}
}

// stream reads the frames of one kind.
type stream struct {
	frames *frames
	kind   byte
	end    int64
	rest   []byte
}

// Read implements io.Reader.
func (s *stream) Read(p []byte) (int, error) {
	for len(s.rest) == 0 {
		if s.frames.at >= s.end {
			return 0, io.EOF
		}
		kind, content, err := s.frames.next()
		if err != nil {
			if err == io.EOF {
				err = errDamaged // it was whole at Open
			}
			return 0, err
		}
		if kind == s.kind {
			s.rest = content
		}
	}
	n := copy(p, s.rest)
	s.rest = s.rest[n:]
	return n, nil
}

// Write appends bytes to a stream. They count once Mark has returned. Memory is bounded: what is long goes to the file at
// once.
func (j *Journal) Write(number int, p []byte) error {
	for len(p) > 0 {
		b := j.buf[number]
		n := min(len(p), maxFrame-len(b))
		j.buf[number] = append(b, p[:n]...)
		if p = p[n:]; len(j.buf[number]) == maxFrame {
			if err := j.flush(number); err != nil {
				return err
			}
		}
	}
	return nil
}

// Mark brings all streams to the disk, and then says so in the file. len(content) is at most 65536.
func (j *Journal) Mark(content []byte) error {
	for number := range j.buf {
		if len(j.buf[number]) > 0 {
			if err := j.flush(number); err != nil {
				return err
			}
		}
	}
	if err := j.put(mark, content); err != nil {
		return err
	}
	return j.file.Sync()
}

func (j *Journal) flush(number int) error {
	err := j.put(byte(number), j.buf[number])
	j.buf[number] = j.buf[number][:0]
	return err
}

// put writes one frame; before the first one, the file is cut behind the last mark.
func (j *Journal) put(kind byte, content []byte) error {
	if !j.begun {
		if err := j.begin(); err != nil {
			return err
		}
	}
	frame, sum := appendFrame(j.frame[:0], kind, content, j.sum)
	j.frame = frame
	if _, err := j.file.WriteAt(frame, j.at); err != nil {
		return err
	}
	j.at, j.sum = j.at+int64(len(frame)), sum
	return nil
}

func (j *Journal) begin() error {
	j.begun = true
	j.at, j.sum = j.kept.end, j.kept.sum
	if err := j.file.Truncate(j.at); err != nil {
		return err
	}
	if j.at > 0 {
		return nil
	}
	if _, err := j.file.WriteAt(head(), 0); err != nil {
		return err
	}
	frames := newFrames(j.file)
	j.at, j.sum = frames.at, frames.sum
	return nil
}
