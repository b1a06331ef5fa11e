package arrowfile

import (
	"encoding/binary"
	"fmt"
)

// The few FlatBuffers tables of the Arrow format that arrow/go keeps to itself are read by hand (message header and
// compression, file footer), after https://arrow.apache.org/docs/format/Columnar.html and its Message.fbs and File.fbs.
// Reads beyond the bytes panic; callers run inside a recover.

// Kinds of message header, from Message.fbs.
const (
	headerSchema     = 1
	headerDictionary = 2
	headerRecord     = 3
)

// typeUnion is the number of the union type, from Schema.fbs.
const typeUnion = 14

// fbTable is a table at a position of a FlatBuffers buffer.
type fbTable struct {
	b   []byte
	pos int
}

// fbRoot is the table that a buffer begins with.
func fbRoot(b []byte) fbTable { return fbTable{b, int(binary.LittleEndian.Uint32(b))} }

// at is the position of the field in slot i, 0 when the table does not have it.
func (t fbTable) at(i int) int {
	vt := t.pos - int(int32(binary.LittleEndian.Uint32(t.b[t.pos:])))
	if 4+2*i+2 > int(binary.LittleEndian.Uint16(t.b[vt:])) {
		return 0
	}
	if off := int(binary.LittleEndian.Uint16(t.b[vt+4+2*i:])); off != 0 {
		return t.pos + off
	}
	return 0
}

// byte is the one-byte field in slot i, or the given default.
func (t fbTable) byte(i int, none byte) byte {
	if p := t.at(i); p != 0 {
		return t.b[p]
	}
	return none
}

// int64 is the eight-byte field in slot i, or 0.
func (t fbTable) int64(i int) int64 {
	if p := t.at(i); p != 0 {
		return int64(binary.LittleEndian.Uint64(t.b[p:]))
	}
	return 0
}

// int16 is the two-byte field in slot i, or 0.
func (t fbTable) int16(i int) int {
	if p := t.at(i); p != 0 {
		return int(int16(binary.LittleEndian.Uint16(t.b[p:])))
	}
	return 0
}

// int64s are the numbers in slot i.
func (t fbTable) int64s(i int) []int64 {
	pos, n := t.vector(i)
	list := make([]int64, 0, min(n, len(t.b)/8))
	for k := range n {
		list = append(list, int64(binary.LittleEndian.Uint64(t.b[pos+8*k:])))
	}
	return list
}

// tables are the tables in slot i.
func (t fbTable) tables(i int) []fbTable {
	pos, n := t.vector(i)
	list := make([]fbTable, 0, min(n, len(t.b)/4))
	for k := range n {
		p := pos + 4*k
		list = append(list, fbTable{t.b, p + int(binary.LittleEndian.Uint32(t.b[p:]))})
	}
	return list
}

// table is the table that slot i points to.
func (t fbTable) table(i int) (fbTable, bool) {
	p := t.at(i)
	if p == 0 {
		return fbTable{}, false
	}
	return fbTable{t.b, p + int(binary.LittleEndian.Uint32(t.b[p:]))}, true
}

// vector is the position of the first element of the vector in slot i, and its length.
func (t fbTable) vector(i int) (pos, n int) {
	p := t.at(i)
	if p == 0 {
		return 0, 0
	}
	p += int(binary.LittleEndian.Uint32(t.b[p:]))
	return p + 4, int(binary.LittleEndian.Uint32(t.b[p:]))
}

// listFits tells whether the elements of the vector in slot i are within the buffer.
func (t fbTable) listFits(i, width int) error {
	if pos, n := t.vector(i); n > (len(t.b)-pos)/width {
		return fmt.Errorf("list of %d elements in a message of %d bytes", n, len(t.b))
	}
	return nil
}

// keyValues are the key and value of the KeyValue tables in slot i.
func (t fbTable) keyValues(i int) (keys, values []string) {
	pos, n := t.vector(i)
	for k := range n {
		p := pos + 4*k
		kv := fbTable{t.b, p + int(binary.LittleEndian.Uint32(t.b[p:]))}
		keys, values = append(keys, kv.text(0)), append(values, kv.text(1))
	}
	return keys, values
}

// text is the string in slot i, or "".
func (t fbTable) text(i int) string {
	pos, n := t.vector(i)
	return string(t.b[pos : pos+n])
}
