package arrowfile

import "encoding/binary"

// appendFooter appends the footer of an Arrow file (File.fbs) to dst, which must be empty or a multiple of 8 long:
//
//	 0  offset of the table                        44  dictionaries: count, 24 bytes each
//	 4  vtable: 14, 24, and where its fields are       record batches: count, 24 bytes each
//	20  table: schema, dictionaries, record            metadata: count, offsets, then keys and values
//	    batches, metadata, version                     the stream's schema message, whole: the footer's schema
//	                                                   points into it, for offsets in FlatBuffers are relative
//
// Metadata goes in as keys and values in turn.
func appendFooter(dst []byte, dicts, recs []block, meta []string, schemaMessage []byte) []byte {
	const vtable, table, version = 4, 20, 4 // version 4 is MetadataVersion V5
	le := binary.LittleEndian
	b := make([]byte, 44)
	le.PutUint32(b, table)
	slots := []uint16{14, 24, 20, 4, 8, 12, 16} // sizes of vtable and table; version, schema, dictionaries, batches, metadata
	if len(meta) == 0 {
		slots[6] = 0
	}
	for i, v := range slots {
		le.PutUint16(b[vtable+2*i:], v)
	}
	le.PutUint32(b[table:], table-vtable)
	le.PutUint16(b[table+20:], version)
	point := func(at int) { le.PutUint32(b[table+at:], uint32(len(b)-table-at)) }

	point(8)
	b = appendBlocks(b, dicts)
	b = append(b, 0, 0, 0, 0)
	point(12)
	b = appendBlocks(b, recs)
	if len(meta) > 0 {
		point(16)
		b = appendKeyValues(b, meta)
	}
	b = pad(b, 8)
	schema, _ := fbRoot(schemaMessage).table(2)
	le.PutUint32(b[table+4:], uint32(len(b)+schema.pos-table-4))
	return append(dst, append(b, schemaMessage...)...)
}

// appendBlocks appends a vector of Block structs; len(b) must be 4 beyond a multiple of 8.
func appendBlocks(b []byte, blocks []block) []byte {
	le := binary.LittleEndian
	b = le.AppendUint32(b, uint32(len(blocks)))
	for _, bl := range blocks {
		b = le.AppendUint64(b, uint64(bl.off))
		b = le.AppendUint64(b, uint64(bl.meta)) // 4 bytes and 4 of padding
		b = le.AppendUint64(b, uint64(bl.body))
	}
	return b
}

// appendKeyValues appends a vector of KeyValue tables.
func appendKeyValues(b []byte, meta []string) []byte {
	le := binary.LittleEndian
	n := len(meta) / 2
	b = le.AppendUint32(b, uint32(n))
	first := len(b)
	b = append(b, make([]byte, 4*n)...)
	for i := range n {
		vtable := len(b)
		for _, v := range []uint16{8, 12, 4, 8} {
			b = le.AppendUint16(b, v)
		}
		table := len(b)
		le.PutUint32(b[first+4*i:], uint32(table-first-4*i))
		b = le.AppendUint32(b, uint32(table-vtable))
		b = append(b, make([]byte, 8)...)
		for k, s := range meta[2*i : 2*i+2] {
			le.PutUint32(b[table+4+4*k:], uint32(len(b)-table-4-4*k))
			b = le.AppendUint32(b, uint32(len(s)))
			b = append(b, s...)
			b = pad(append(b, 0), 4)
		}
	}
	return b
}

// pad fills b with zeros to a multiple of n.
func pad(b []byte, n int) []byte {
	for len(b)%n != 0 {
		b = append(b, 0)
	}
	return b
}
