package arrowfile

import (
	"encoding/binary"
	"errors"
	"fmt"
)

// check looks at the buffers of a record or dictionary message before arrow does, and counts record batches.
func (m *messages) check(root fbTable, body int64) error {
	kind := root.byte(1, 0)
	rec, ok := batchTable(root)
	switch {
	case !ok:
		return errors.New("message without a header")
	case kind == headerRecord:
		m.batch++
	case kind == headerSchema:
		left := mostFields
		return fieldsFit(rec, 1, 0, &left)
	case kind != headerDictionary:
		return nil
	}
	if err := m.enough(root, rec); err != nil {
		return err
	}
	pos, n := rec.vector(4) // of views, how many buffers hold their bytes
	for i := range n {
		if k := int64(binary.LittleEndian.Uint64(rec.b[pos+8*i:])); k < 0 || k > int64(len(rec.b)) {
			return fmt.Errorf("%d buffers for a column of views", k)
		}
	}
	pos, n = rec.vector(2)
	for i := range n {
		at := rec.b[pos+16*i:]
		off, size := int64(binary.LittleEndian.Uint64(at)), int64(binary.LittleEndian.Uint64(at[8:]))
		if off < 0 || size < 0 || off > body || size > body-off {
			return badBuffer(i, "stands at bytes %d+%d of a message of %d", off, size, body)
		}
	}
	return nil
}

// unpackable looks at what the compressed buffers of a record or dictionary message say they unpack to, for so much is
// allocated, and at their sum. One byte of LZ4 stands for at most 255, and four of Zstandard for a block of 128 KiB (RFC 8878, 3.1.1.2).
func unpackable(root fbTable, body []byte, most int64) error {
	if kind := root.byte(1, 0); kind != headerRecord && kind != headerDictionary {
		return nil
	}
	rec, ok := batchTable(root)
	if !ok {
		return nil
	}
	how, packed := rec.table(3)
	if !packed {
		return nil
	}
	ratio := int64([...]int{255, 128 << 10 / 4}[how.byte(0, 0)])
	pos, n := rec.vector(2)
	sum := int64(0)
	for i := range n {
		at := rec.b[pos+16*i:]
		off, size := int64(binary.LittleEndian.Uint64(at)), int64(binary.LittleEndian.Uint64(at[8:]))
		if size == 0 {
			continue
		}
		if size < 8 {
			return badBuffer(i, "of %d bytes is too short to be compressed", size)
		}
		full := int64(binary.LittleEndian.Uint64(body[off:]))
		if full < -1 || full > 128<<10+ratio*(size-8) { // −1: it is not compressed after all
			return badBuffer(i, "of %d bytes can't unpack to %d", size, full)
		}
		if sum += max(full, size-8); most > 0 && sum > most {
			return &tooLarge{i, sum, most}
		}
	}
	return nil
}

// bufferError is a fault of one buffer.
type bufferError struct {
	buffer int
	text   string
}

func badBuffer(i int, format string, args ...any) error {
	return &bufferError{i, fmt.Sprintf(format, args...)}
}

func (e *bufferError) Error() string { return fmt.Sprintf("buffer %d %s", e.buffer, e.text) }

// tooLarge is a message that takes more memory than it may.
type tooLarge struct {
	buffer       int // at which that is sure
	wanted, most int64
}

func (e *tooLarge) Error() string {
	return fmt.Sprintf("it unpacks to %d MB or more, and %d may be", e.wanted>>20, e.most>>20)
}

// A schema has at most so many fields, nested so deep: arrow/go reads 64 levels.
const (
	mostFields = 1 << 20
	mostDepth  = 64
)

// fieldsFit looks at the lengths of a schema's or field's lists, for arrow allocates as much as they say. Slot has the
// children; the metadata follows it. left counts down the fields that may still come.
func fieldsFit(t fbTable, slot, depth int, left *int) error {
	if depth > mostDepth {
		return errors.New("fields are nested too deep")
	}
	for _, list := range []int{slot, slot + 1} {
		if err := t.listFits(list, 4); err != nil {
			return err
		}
	}
	pos, n := t.vector(slot)
	if *left -= n; *left < 0 {
		return errors.New("too many fields")
	}
	for i := range n {
		p := pos + 4*i
		f := fbTable{t.b, p + int(binary.LittleEndian.Uint32(t.b[p:]))}
		if dt, ok := f.table(3); ok && f.byte(2, 0) == typeUnion {
			if err := dt.listFits(1, 4); err != nil {
				return err
			}
		}
		if err := fieldsFit(f, 5, depth+1, left); err != nil {
			return err
		}
	}
	return nil
}

// batchTable is the RecordBatch table of a record or dictionary message.
func batchTable(root fbTable) (fbTable, bool) {
	t, ok := root.table(2)
	if ok && root.byte(1, 0) == headerDictionary {
		t, ok = t.table(1)
	}
	return t, ok
}

// firstCodec is how the first record batch is compressed, which stands for all. It reads message headers only and does
// not move on.
func (m *messages) firstCodec() Codec {
	off := int64(0)
	if m.format == File {
		if len(m.recs) == 0 {
			return Plain
		}
		off = m.recs[0].off
	}
	for {
		meta, next, err := m.readMeta(off)
		if err != nil {
			return Plain
		}
		root := fbRoot(meta)
		if root.byte(1, 0) == headerRecord {
			rec, _ := root.table(2)
			if c, ok := rec.table(3); ok {
				return [...]Codec{LZ4, Zstd}[c.byte(0, 0)]
			}
			return Plain
		}
		off = next + max(0, root.int64(3))
	}
}
