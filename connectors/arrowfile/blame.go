package arrowfile

import (
	"encoding/binary"
	"errors"
	"sort"

	"github.com/apache/arrow/go/v16/arrow"
	"github.com/apache/arrow/go/v16/arrow/ipc"
	"github.com/apache/arrow/go/v16/arrow/memory"

	"labelweir/connectors/internal/capped"
)

// blame finds the column at which reading a record batch fails, for the message to name; empty when it can't be told. A
// fault of one buffer tells it. Otherwise the batch is read again with fewer and fewer columns.
// Arrow reads columns in order, so that a batch without its columns from k on fails only when the faulty one is among the
// first k. It costs some readings of the file up to that batch, of which all are thrown away.
func (r *reader) blame(err error) (column string) {
	defer func() {
		if recover() != nil { // the batch's head makes no sense: then no column does
			column = ""
		}
	}()
	schema := r.rd.Schema()
	if id, ok := r.msgs.dictionaryAtFault(); ok {
		return columnOfDictionary(r.msgs.schema, schema, id)
	}
	if r.msgs.recordAtFault() == nil {
		return ""
	}
	if bad := (*bufferError)(nil); errors.As(err, &bad) {
		return r.columnOfBuffer(bad.buffer)
	}
	if large := (*tooLarge)(nil); errors.As(err, &large) { // not to be read again
		return r.columnOfBuffer(large.buffer)
	}
	n := schema.NumFields()
	k := sort.Search(n+1, func(k int) bool { return r.failsWith(k) })
	if k == 0 || k > n {
		return ""
	}
	return schema.Field(k - 1).Name
}

// columnOfBuffer is the column that a buffer of the record batch being read belongs to.
func (r *reader) columnOfBuffer(buffer int) string {
	root := fbRoot(r.msgs.head)
	rec, _ := root.table(2)
	c := share{old: root.int16(0) < 4, views: rec.int64s(4)}
	for i, f := range fieldsOf(r.msgs.schema) {
		if c.count(f, false, 0); buffer < c.buffers {
			return r.rd.Schema().Field(i).Name
		}
	}
	return ""
}

// failsWith tells whether the record batch at fault can't be read even without its columns from k on.
func (r *reader) failsWith(k int) (fails bool) {
	defer func() {
		if recover() != nil {
			fails = true
		}
	}()
	m, err := newMessages(r.msgs.r, r.msgs.size)
	if err != nil {
		return true
	}
	m.most = r.msgs.most
	m.keep = func(meta []byte) {
		switch {
		case fbRoot(meta).byte(1, 0) != headerRecord:
		case m.batch+1 < r.msgs.at: // read already, and only in the way here
			empty(meta, r.msgs.schema, 0)
		default:
			empty(meta, r.msgs.schema, k)
		}
	}
	rd, err := ipc.NewReaderFromMessageReader(m, ipc.WithAllocator(capped.New(memory.NewGoAllocator(), m.size)))
	if err != nil {
		return true
	}
	defer rd.Release()
	for range r.msgs.at {
		if !rd.Next() {
			return true
		}
	}
	return false
}

// empty takes the columns from k on out of the head of a record batch, with the head of the schema message: they have no rows, and their buffers no bytes. The
// batch has no rows either, for arrow refuses columns that are shorter.
func empty(meta, schema []byte, k int) {
	le := binary.LittleEndian
	root := fbRoot(meta)
	rec, _ := root.table(2)
	if p := rec.at(0); p != 0 {
		le.PutUint64(rec.b[p:], 0)
	}
	c := share{old: root.int16(0) < 4, views: rec.int64s(4)}
	for _, f := range fieldsOf(schema)[:k] {
		c.count(f, false, 0)
	}
	for _, list := range []struct{ slot, from int }{{1, c.nodes}, {2, c.buffers}} {
		pos, n := rec.vector(list.slot)
		for i := list.from; i < n; i++ {
			clear(rec.b[pos+16*i : pos+16*i+16]) // a node's rows and nulls, or a buffer's place and length
		}
	}
}

// dictionaryAtFault is the number of the dictionary that was being read last.
func (m *messages) dictionaryAtFault() (id int64, ok bool) {
	if m.head == nil || fbRoot(m.head).byte(1, 0) != headerDictionary {
		return 0, false
	}
	t, ok := fbRoot(m.head).table(2)
	return t.int64(0), ok
}

// recordAtFault is the head of the record batch that was being read last.
func (m *messages) recordAtFault() []byte {
	if m.head == nil || fbRoot(m.head).byte(1, 0) != headerRecord {
		return nil
	}
	return m.head
}

// columnOfDictionary is the column, by the head of the schema message, in which the dictionary of that number is used.
func columnOfDictionary(head []byte, schema *arrow.Schema, id int64) string {
	for i, f := range fieldsOf(head) {
		if _, ok := encodedField(f, id, 0); ok && i < schema.NumFields() {
			return schema.Field(i).Name
		}
	}
	return ""
}
