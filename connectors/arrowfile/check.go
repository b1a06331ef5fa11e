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
	case kind != headerDictionary:
		return nil
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
			return fmt.Errorf("buffer %d stands at bytes %d+%d of a message of %d", i, off, size, body)
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

// unpackedSizes looks at what compressed buffers say of their size, for arrow allocates that much.
func unpackedSizes(root fbTable, body []byte) error {
	const most = 1 << 31
	kind := root.byte(1, 0)
	rec, ok := batchTable(root)
	if !ok || (kind != headerRecord && kind != headerDictionary) {
		return nil
	}
	if _, packed := rec.table(3); !packed {
		return nil
	}
	pos, n := rec.vector(2)
	for i := range n {
		at := rec.b[pos+16*i:]
		off, size := binary.LittleEndian.Uint64(at), binary.LittleEndian.Uint64(at[8:])
		if size == 0 {
			continue
		}
		if size < 8 {
			return fmt.Errorf("compressed buffer of %d bytes", size)
		}
		if u := int64(binary.LittleEndian.Uint64(body[off:])); u < -1 || u > most {
			return fmt.Errorf("compressed buffer of %d bytes unpacks to %d", size, u)
		}
	}
	return nil
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
