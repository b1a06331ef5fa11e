package arrowfile

import (
	"bytes"
	"encoding/binary"
	"errors"
	"fmt"
	"io"

	"github.com/apache/arrow/go/v16/arrow/ipc"
	"github.com/apache/arrow/go/v16/arrow/memory"

	"labelweir/connectors/table"
)

// Format is one of the two layouts of Arrow IPC.
type Format uint8

// The formats.
const (
	File   Format = iota + 1 // with magic bytes and a footer
	Stream                   // messages one after the other
)

// String gives the format's name in plain words.
func (f Format) String() string { return [...]string{"unknown", "Arrow file", "Arrow stream"}[f] }

// Codec is how buffers are compressed.
type Codec uint8

// The codecs.
const (
	Plain Codec = iota
	LZ4
	Zstd
)

// String gives the codec's name.
func (c Codec) String() string { return [...]string{"none", "lz4", "zstd"}[c] }

// block is where a message stands in the file.
type block struct{ off, meta, body int64 }

// messages hands the messages of either format to arrow's stream reader: schema, dictionaries, records. A length that
// goes beyond the file is refused before anything is allocated for it.
type messages struct {
	r      io.ReaderAt
	size   int64
	format Format
	recs   []block  // file: all record batches
	footer []string // keys and values of the footer's own metadata, in turn

	pos    int64   // stream: where the next message begins
	blocks []block // file: what is still to come
	last   *ipc.Message
	body   []byte // of the last message
	seen   int64  // byte behind the last message read
	batch  int    // record batches handed out
	at     int    // record batch being read, counted from 1
	schema []byte // head of the schema message
	head   []byte // head of the last message, as it was found

	most int64             // bytes that a message may unpack to; 0: no limit
	keep func(meta []byte) // see blame: changes the head of a message
}

var errNotArrow = errors.New("not Arrow IPC")

// newMessages finds out the format and, for a file, reads the footer.
func newMessages(r io.ReaderAt, size int64) (m *messages, err error) {
	defer func() {
		if p := recover(); p != nil {
			err = table.Caught(p)
		}
	}()
	m = &messages{r: r, size: size}
	head := make([]byte, 8)
	n, err := r.ReadAt(head, 0)
	if err != nil && err != io.EOF {
		return nil, err
	}
	switch head = head[:n]; {
	case bytes.HasPrefix(head, ipc.Magic):
		m.format = File
		return m, m.readFooter()
	case n == 8 && binary.LittleEndian.Uint32(head) == 0xFFFFFFFF && int32(binary.LittleEndian.Uint32(head[4:])) > 0,
		n == 8 && binary.LittleEndian.Uint32(head) < uint32(min(size, 1<<24)): // streams older than Arrow 0.15 start with the length
		m.format = Stream
		return m, m.startsWithSchema()
	}
	return nil, errNotArrow
}

// startsWithSchema looks at the first message of a stream, so that other files are told from damaged streams.
func (m *messages) startsWithSchema() (err error) {
	defer func() {
		if recover() != nil {
			err = errNotArrow
		}
	}()
	meta, _, err := m.readMeta(0)
	if err != nil || fbRoot(meta).byte(1, 0) != headerSchema {
		return errNotArrow
	}
	return nil
}

// readFooter lists the messages of a file. The footer ends in its length (4 bytes) and the magic (6 bytes).
func (m *messages) readFooter() error {
	tail := int64(4 + len(ipc.Magic))
	if m.size < 8+tail {
		return errors.New("the file ends before its footer")
	}
	end := make([]byte, tail)
	if _, err := m.r.ReadAt(end, m.size-tail); err != nil {
		return err
	}
	if !bytes.Equal(end[4:], ipc.Magic) {
		return errors.New("the file ends before its footer")
	}
	n := int64(binary.LittleEndian.Uint32(end))
	if n == 0 || n > m.size-tail-8 {
		return fmt.Errorf("footer of %d bytes in a file of %d", n, m.size)
	}
	b := make([]byte, n)
	if _, err := m.r.ReadAt(b, m.size-tail-n); err != nil {
		return err
	}
	root := fbRoot(b)
	m.blocks = []block{{off: 8}}       // the schema message follows the magic, as in a stream
	for _, slot := range []int{2, 3} { // dictionaries, record batches
		pos, count := root.vector(slot)
		for i := range count {
			at := b[pos+24*i:]
			bl := block{
				off:  int64(binary.LittleEndian.Uint64(at)),
				meta: int64(int32(binary.LittleEndian.Uint32(at[8:]))),
				body: int64(binary.LittleEndian.Uint64(at[16:])),
			}
			if bl.off < 8 || bl.meta < 0 || bl.body < 0 || bl.off > m.size || bl.meta > m.size-bl.off || bl.body > m.size-bl.off-bl.meta {
				return fmt.Errorf("footer points to bytes %d+%d+%d of %d", bl.off, bl.meta, bl.body, m.size)
			}
			m.blocks = append(m.blocks, bl)
			if slot == 3 {
				m.recs = append(m.recs, bl)
			}
		}
	}
	keys, values := root.keyValues(4)
	for i := range keys {
		m.footer = append(m.footer, keys[i], values[i])
	}
	return nil
}

// Message gives the next message or io.EOF. It is valid until the next call.
func (m *messages) Message() (*ipc.Message, error) {
	m.at, m.head = m.batch+1, nil
	off := m.pos
	if m.format == File {
		if len(m.blocks) == 0 {
			return nil, io.EOF
		}
		off, m.blocks = m.blocks[0].off, m.blocks[1:]
	} else if off == m.size {
		return nil, io.EOF // a stream need not say that it ends
	}
	meta, next, err := m.readMeta(off)
	if err != nil {
		return nil, err
	}
	m.head = meta
	root := fbRoot(meta)
	n := root.int64(3)
	if n < 0 || n > m.size-next {
		return nil, fmt.Errorf("message of %d bytes at byte %d of %d", n, next, m.size)
	}
	if m.schema == nil {
		m.schema = meta
	}
	if m.keep != nil {
		m.keep(meta)
	}
	if err := m.check(root, n); err != nil {
		return nil, err
	}
	if err := m.readBody(next, int(n)); err != nil {
		return nil, err
	}
	if err := unpackable(root, m.body, m.most); err != nil {
		return nil, err
	}
	m.Release()
	m.pos, m.seen = next+n, next+n
	head := memory.NewBufferBytes(meta)
	m.last = ipc.NewMessage(head, memory.NewBufferBytes(m.body))
	return m.last, nil
}

// readBody reads a message body into memory that serves all messages: arrow copies what it needs.
func (m *messages) readBody(off int64, n int) error {
	if cap(m.body) < n {
		m.body = make([]byte, n)
	}
	m.body = m.body[:n]
	if n == 0 {
		return nil
	}
	if _, err := m.r.ReadAt(m.body, off); err != nil {
		return fmt.Errorf("message body at byte %d: %w", off, err)
	}
	return nil
}

// readMeta reads the metadata of the message at off; next is where its body begins.
func (m *messages) readMeta(off int64) (meta []byte, next int64, err error) {
	var pre [8]byte
	if k, err := m.r.ReadAt(pre[:], off); k < 4 || (err != nil && err != io.EOF) {
		return nil, 0, fmt.Errorf("message at byte %d: %w", off, io.ErrUnexpectedEOF)
	}
	n := int64(int32(binary.LittleEndian.Uint32(pre[:])))
	next = off + 4
	if n == -1 {
		n = int64(int32(binary.LittleEndian.Uint32(pre[4:])))
		next = off + 8
	}
	if n == 0 {
		return nil, 0, io.EOF
	}
	if n < 0 || n > m.size-next {
		return nil, 0, fmt.Errorf("message header of %d bytes at byte %d of %d", n, next, m.size)
	}
	meta = make([]byte, n)
	if _, err := m.r.ReadAt(meta, next); err != nil {
		return nil, 0, fmt.Errorf("message header at byte %d: %w", next, err)
	}
	return meta, next + n, nil
}

// missing is how many record batches the footer lists that were not handed out.
func (m *messages) missing() int { return len(m.blocks) }

// Release gives back the last message; messages has no count of its own, it belongs to one reader.
func (m *messages) Release() {
	if m.last != nil {
		m.last.Release()
		m.last = nil
	}
}

// Retain does nothing, see Release.
func (m *messages) Retain() {}
