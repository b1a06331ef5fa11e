package model

import (
	"bytes"
	"crypto/sha256"
	"encoding/binary"
	"encoding/hex"
	"fmt"
	"io"
)

// The saved form. Integers are little-endian; uN is unsigned, iN signed, N bits; a text is u32 length and its bytes; a
// list is u32 count and its entries; f32 and f64 are IEEE 754, an estimate is f64 value, low and high and u64 rows. The
// same snapshot always gives the same bytes. What the numbers mean to the code that reads them belongs to the version.
//
//	bytes  field
//	8      "LWSNAP\r\n", which a transfer as text would damage
//	4      u32 version, 1
//	8      u64 length of the payload
//	       payload: facts, columns, members, noise layer
//	32     SHA-256 of all bytes before it; the first 6 of them are the snapshot's id
//
//	facts:
//	8        u64 rows trained on
//	         list of classes: text name, u64 rows
//	         list of sources: text
//	         choice: text encoder, f64 q, f64 λ, text why, list of members: text name, f64 weight
//	         list of chains: text name, u64 tried, u64 won, f64 mean gap
//	         noise: estimate share, k estimates by class, estimates by source, k·k estimates of flips, text model,
//	         list of unclear classes: text
//	9        f64 threshold, u8 warm start
//
//	columns: list of
//	         text name, u8 kind, u32 numbers a row
//	         number and vector, for each of its numbers:
//	           list of knots: f64 value, f64 normal quantile; list of bin edges: f64; u8 has missing values, f64 filler
//	         category: list of the levels with a column of their own: text
//
//	members, the packed scorers:
//	1        u8 count of forests, each:
//	           list of nodes, tree after tree, each level by level: u16 feature, u8 cut, u8 is a split;
//	           list of columns of leaf values: f64 low, f64 step; for each leaf, four columns a u64, u16 q: low + step·q
//	1        u8 count of kernels, each: f64 gamma, u32 dim, u32 landmarks, landmarks·dim f32
//	1        u8 count of members, each:
//	           u8 forest + 1, u32 first column, u8 linear; a linear one goes on with u8 kernel + 1, f64 clip, f64 scale,
//	           list of pairs: u16 a, u16 b, f64 bias; list of f32 weights, list of f32 weights on kernel values
//
//	noise layer:
//	         list of models: text name, f64 weight, list of f64 a, k f64 b, list of slopes: u16 c, u16 d, f64 μ;
//	           k·k f64 flips, f64 γ, f64 τ, u8 has sources, list of f64 ρ
//	         list of steps: f64 at, f64 share
const (
	magic   = "LWSNAP\r\n"
	version = 1
	headLen = len(magic) + 4 + 8
)

// maxPayload is far above any snapshot there is; a longer one is damage.
const maxPayload = 1 << 40

// WriteTo saves the snapshot. The number of bytes written is returned, and the writer's error as it is.
func (s *Snapshot) WriteTo(w io.Writer) (int64, error) {
	var length counter
	s.payload(newEncoder(&length))
	sum := sha256.New()
	out := counter{to: w}
	e := newEncoder(io.MultiWriter(&out, sum))
	e.bytes(appendHead(nil, uint64(length.n)))
	s.payload(e)
	if e.err != nil {
		return out.n, e.err
	}
	_, err := out.Write(sum.Sum(nil))
	return out.n, err
}

// appendHead appends what stands before a payload of that length.
func appendHead(dst []byte, length uint64) []byte {
	dst = append(dst, magic...)
	dst = binary.LittleEndian.AppendUint32(dst, version)
	return binary.LittleEndian.AppendUint64(dst, length)
}

// seal sets the id.
func (s *Snapshot) seal() {
	last := &tail{}
	s.WriteTo(last) // a tail takes everything
	s.id = hex.EncodeToString(last.bytes[:6])
}

// tail keeps the last bytes written to it, as many as a checksum has.
type tail struct{ bytes [sha256.Size]byte }

func (t *tail) Write(p []byte) (int, error) {
	if n := len(p); n < len(t.bytes) {
		copy(t.bytes[:], t.bytes[n:])
		copy(t.bytes[len(t.bytes)-n:], p)
	} else {
		copy(t.bytes[:], p[n-len(t.bytes):])
	}
	return len(p), nil
}

// ReadSnapshot loads what WriteTo saved and reads no further. Foreign, cut or damaged bytes give an error that wraps
// ErrSnapshot and says what is wrong with them; memory is taken in proportion to the bytes that are there. A reader's
// own error is returned as it is.
func ReadSnapshot(r io.Reader) (*Snapshot, error) {
	var raw bytes.Buffer
	if err := fill(&raw, r, uint64(headLen)); err != nil {
		return nil, err
	}
	head := raw.Bytes()
	if string(head[:len(magic)]) != magic {
		return nil, fmt.Errorf("%w: it begins with %q, not %q", ErrSnapshot, head[:len(magic)], magic)
	}
	if v := binary.LittleEndian.Uint32(head[len(magic):]); v != version {
		return nil, fmt.Errorf("%w: its version is %d; this program reads version %d", ErrSnapshot, v, version)
	}
	n := binary.LittleEndian.Uint64(head[len(magic)+4:])
	if n > maxPayload {
		return nil, fmt.Errorf("%w: it claims a length of %d bytes", ErrSnapshot, n)
	}
	if err := fill(&raw, r, n+sha256.Size); err != nil {
		return nil, err
	}
	all := raw.Bytes()
	body, want := all[:len(all)-sha256.Size], all[len(all)-sha256.Size:]
	if sum := sha256.Sum256(body); !bytes.Equal(sum[:], want) {
		return nil, fmt.Errorf("%w: damaged, the checksum does not fit", ErrSnapshot)
	}
	s, err := decode(body[headLen:])
	if err != nil {
		return nil, fmt.Errorf("%w: %w", ErrSnapshot, err)
	}
	s.id = hex.EncodeToString(want[:6])
	return s, nil
}

// fill reads n bytes into b.
func fill(b *bytes.Buffer, r io.Reader, n uint64) error {
	got, err := io.CopyN(b, r, int64(n))
	if err == io.EOF {
		return fmt.Errorf("%w: cut short after %d bytes, %d more were expected", ErrSnapshot, b.Len(), int64(n)-got)
	}
	return err
}
