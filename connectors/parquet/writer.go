package parquet

import (
	"encoding/base64"
	"io"

	"github.com/apache/arrow/go/v16/arrow"
	"github.com/apache/arrow/go/v16/arrow/flight"
	"github.com/apache/arrow/go/v16/arrow/memory"
	"github.com/apache/arrow/go/v16/parquet"
	"github.com/apache/arrow/go/v16/parquet/compress"
	"github.com/apache/arrow/go/v16/parquet/pqarrow"

	"labelweir/connectors/table"
)

// A row group written has at most groupRows rows, and fewer when their bytes, compressed, would be more than groupBytes:
// it is held in memory until it is whole.
const (
	groupRows  = 1 << 17
	groupBytes = 64 << 20
)

// manner is what an output takes over from its input beside the schema.
type manner struct {
	columns map[string]chunkManner // by the path of the column
	codec   compress.Compression   // of most columns
	footer  []string               // metadata of the footer, keys and values in turn
}

type chunkManner struct {
	codec      compress.Compression
	dictionary bool
}

// Manner implements table.Manner: how the columns of the first row group were written stands for all.
func (r *reader) Manner() any {
	m := manner{columns: map[string]chunkManner{}, codec: compress.Codecs.Snappy}
	meta := r.pf.MetaData()
	if kv := meta.KeyValueMetadata(); kv != nil {
		for i, key := range kv.Keys() {
			m.footer = append(m.footer, key, kv.Values()[i])
		}
	}
	if len(meta.RowGroups) == 0 {
		return m
	}
	rg, count := meta.RowGroup(0), map[compress.Compression]int{}
	for c := range rg.NumColumns() {
		col, err := rg.ColumnChunk(c)
		if err != nil {
			continue
		}
		codec := col.Compression()
		m.columns[col.PathInSchema().String()] = chunkManner{codec, col.HasDictionaryPage()}
		if count[codec]++; count[codec] > count[m.codec] {
			m.codec = codec
		}
	}
	return m
}

// writer writes record batches; it implements table.Writer. The schema, with what Parquet has no place for, goes along in
// the footer as Arrow's libraries do it.
type writer struct {
	fw    *pqarrow.FileWriter
	loose *arrow.Schema // see loosened
	mem   memory.Allocator
	rows  int64 // of the row group
}

func newWriter(w io.Writer, schema *arrow.Schema, opt table.WriteOptions) (*writer, error) {
	how, same := opt.Manner.(manner)
	if !same {
		how.codec = compress.Codecs.Snappy
	}
	props := []parquet.WriterProperty{parquet.WithAllocator(opt.Memory), parquet.WithVersion(parquet.V2_LATEST),
		parquet.WithMaxRowGroupLength(groupRows), parquet.WithCompression(how.codec)}
	for path, c := range how.columns {
		props = append(props, parquet.WithCompressionFor(path, c.codec), parquet.WithDictionaryFor(path, c.dictionary))
	}
	for _, f := range schema.Fields() {
		if _, known := how.columns[f.Name]; !known && !dictionaryPays(f, how.codec) {
			props = append(props, parquet.WithDictionaryFor(f.Name, false))
		}
	}
	pq, aq := parquet.NewWriterProperties(props...), pqarrow.NewArrowWriterProperties(pqarrow.WithAllocator(opt.Memory))
	if err := storable(schema, pq, aq); err != nil {
		return nil, err
	}
	wr := &writer{loose: loosened(schema), mem: opt.Memory}
	var err error
	if wr.fw, err = pqarrow.NewFileWriter(wr.loose, w, pq, aq); err != nil {
		return nil, err
	}
	return wr, wr.describe(schema, how.footer)
}

// dictionaryPays tells whether a column that the input does not have is written with a dictionary. Floating-point numbers
// hardly ever repeat; the text of the tags does, but the library makes an object of each value that it looks up, and any
// compression finds the same.
func dictionaryPays(f arrow.Field, codec compress.Compression) bool {
	return !arrow.IsFloating(f.Type.ID()) && !(table.IsTag(f.Name) && f.Type.ID() == arrow.STRING && codec != compress.Codecs.Uncompressed)
}

// schemaKey is the key under which Arrow's libraries keep the schema in the footer.
const schemaKey = "ARROW:schema"

// describe adds the schema and the metadata of the input's footer to the footer.
func (w *writer) describe(schema *arrow.Schema, footer []string) error {
	text := base64.StdEncoding.EncodeToString(flight.SerializeSchema(schema, w.mem))
	if err := w.fw.AppendKeyValueMetadata(schemaKey, text); err != nil {
		return err
	}
	meta := schema.Metadata()
	for i := 0; i < len(footer); i += 2 {
		if key := footer[i]; key != schemaKey && meta.FindKey(key) < 0 {
			if err := w.fw.AppendKeyValueMetadata(key, footer[i+1]); err != nil {
				return err
			}
		}
	}
	return nil
}

// storable names the first column of a type that Parquet has no place for.
func storable(schema *arrow.Schema, pq *parquet.WriterProperties, aq pqarrow.ArrowWriterProperties) error {
	for _, f := range schema.Fields() {
		if err := stored(f, pq, aq); err != nil {
			return &table.Error{Column: f.Name, What: "values of type " + f.Type.String() + " can't be written as Parquet",
				Do: "write another format, or drop or convert the column", Kind: table.ErrColumn}
		}
	}
	return nil
}

func stored(f arrow.Field, pq *parquet.WriterProperties, aq pqarrow.ArrowWriterProperties) (err error) {
	defer func() {
		if p := recover(); p != nil {
			err = table.Caught(p)
		}
	}()
	_, err = pqarrow.ToParquet(loosened(arrow.NewSchema([]arrow.Field{f}, nil)), pq, aq)
	return err
}

// Write implements table.Writer.
func (w *writer) Write(rec arrow.Record) error {
	if w.rows+rec.NumRows() > groupRows || w.fw.RowGroupTotalCompressedBytes() > groupBytes {
		w.fw.NewBufferedRowGroup()
		w.rows = 0
	}
	w.rows += rec.NumRows()
	loose, err := loosen(rec, w.loose, w.mem)
	if err != nil {
		return err
	}
	defer loose.Release()
	return w.fw.WriteBuffered(loose)
}

// Close implements table.Writer.
func (w *writer) Close() error { return w.fw.Close() }
