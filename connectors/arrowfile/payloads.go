package arrowfile

import (
	"encoding/binary"
	"fmt"
	"io"

	"github.com/apache/arrow/go/v16/arrow/ipc"
)

// payloads writes the messages that arrow's writer makes, in either format. Arrow's own file writer loses the footer's
// metadata and never gives dictionaries back, hence this one.
type payloads struct {
	w      io.Writer
	format Format
	meta   []string // footer metadata, keys and values in turn

	pos         int64
	schema      []byte // the schema message
	dicts, recs []block
	known       map[int64]bool // dictionaries written
}

// Start implements ipc.PayloadWriter. Arrow's writer does not call it for a payload writer of ours, so the first
// payload does.
func (p *payloads) Start() error {
	if p.known = map[int64]bool{}; p.format == File {
		return p.write(pad(append([]byte(nil), ipc.Magic...), 8))
	}
	return nil
}

// WritePayload implements ipc.PayloadWriter: length, message, padding, body.
func (p *payloads) WritePayload(pl ipc.Payload) error {
	if p.known == nil {
		if err := p.Start(); err != nil {
			return err
		}
	}
	buf := pl.Meta()
	defer buf.Release()
	meta := buf.Bytes()
	root := fbRoot(meta)
	kind := root.byte(1, 0)
	if kind == headerDictionary {
		if err := p.oneDictionary(root); err != nil {
			return err
		}
	}
	le := binary.LittleEndian
	size := (len(meta) + 7) / 8 * 8
	head := le.AppendUint32(le.AppendUint32(make([]byte, 0, 8+size), 0xFFFFFFFF), uint32(size))
	head = pad(append(head, meta...), 8)
	bl := block{off: p.pos, meta: int64(len(head)), body: root.int64(3)}
	if err := p.write(head); err != nil {
		return err
	}
	if err := pl.SerializeBody(counter{p}); err != nil {
		return err
	}
	if p.pos != bl.off+bl.meta+bl.body {
		return fmt.Errorf("message body of %d bytes instead of %d", p.pos-bl.off-bl.meta, bl.body)
	}
	switch kind {
	case headerSchema:
		p.schema = append([]byte(nil), meta...)
	case headerDictionary:
		p.dicts = append(p.dicts, bl)
	case headerRecord:
		p.recs = append(p.recs, bl)
	}
	return nil
}

// oneDictionary refuses a second dictionary for a field of a file, which the format does not allow.
func (p *payloads) oneDictionary(root fbTable) error {
	dict, _ := root.table(2)
	id := dict.int64(0)
	if p.format == File && p.known[id] && dict.byte(2, 0) == 0 {
		return fmt.Errorf("dictionary %d changes, which an Arrow file can't hold", id)
	}
	p.known[id] = true
	return nil
}

// Close implements ipc.PayloadWriter: the end-of-stream mark, and for a file the footer.
func (p *payloads) Close() error {
	end := []byte{0xFF, 0xFF, 0xFF, 0xFF, 0, 0, 0, 0}
	if p.format == File {
		footer := appendFooter(nil, p.dicts, p.recs, p.meta, p.schema)
		end = append(end, footer...)
		end = binary.LittleEndian.AppendUint32(end, uint32(len(footer)))
		end = append(end, ipc.Magic...)
	}
	return p.write(end)
}

func (p *payloads) write(b []byte) error {
	n, err := p.w.Write(b)
	p.pos += int64(n)
	return err
}

// counter is an io.Writer for the bodies.
type counter struct{ p *payloads }

func (c counter) Write(b []byte) (int, error) { return len(b), c.p.write(b) }
