package parquet

import (
	"bytes"
	"encoding/base64"
	"encoding/binary"
	"errors"
	"fmt"

	"github.com/apache/arrow/go/v16/parquet/compress"
	"github.com/apache/arrow/go/v16/parquet/metadata"

	"labelweir/connectors/arrowfile"
	"labelweir/connectors/table"
)

const (
	magic          = "PAR1"
	magicEncrypted = "PARE"
	tailBytes      = 8 // length of the footer, magic
)

var errEncrypted = errors.New("it is encrypted")

// footerFits looks at the footer's length, its magic and all lengths in it before the library does. The file ends in
// the footer, its length (4 bytes) and the magic.
func footerFits(f table.File) error {
	if f.Size < int64(len(magic))+tailBytes {
		return errors.New("the file ends before its footer")
	}
	tail := make([]byte, tailBytes)
	if _, err := f.ReadAt(tail, f.Size-tailBytes); err != nil {
		return err
	}
	if bytes.Equal(tail[4:], []byte(magicEncrypted)) {
		return errEncrypted
	}
	if !bytes.Equal(tail[4:], []byte(magic)) {
		return errors.New("the file ends before its footer")
	}
	n := int64(binary.LittleEndian.Uint32(tail))
	if n == 0 || n > f.Size-tailBytes-int64(len(magic)) {
		return fmt.Errorf("footer of %d bytes in a file of %d", n, f.Size)
	}
	b := make([]byte, n)
	if _, err := f.ReadAt(b, f.Size-tailBytes-n); err != nil {
		return err
	}
	return (&walker{b: b}).fields()
}

// groupsFit tells whether every row group and column lies within the file; group and column say where it does not.
func groupsFit(m *metadata.FileMetaData, size int64) (group int, column string, err error) {
	rows := int64(0)
	for g := range m.RowGroups {
		rg := m.RowGroup(g)
		if rg.NumRows() < 0 || rg.NumRows() > m.NumRows-rows {
			return g + 1, "", fmt.Errorf("%d rows, with %d before and %d in the file", rg.NumRows(), rows, m.NumRows)
		}
		rows += rg.NumRows()
		if n := m.Schema.NumColumns(); rg.NumColumns() != n {
			return g + 1, "", fmt.Errorf("%d columns instead of %d", rg.NumColumns(), n)
		}
		for c := range rg.NumColumns() {
			col, err := rg.ColumnChunk(c)
			if err == nil && rg.NumRows() > 0 { // without rows there need be no page
				err = columnFits(col, size)
			}
			if err != nil {
				return g + 1, m.Schema.Column(c).Path(), err
			}
		}
	}
	if rows != m.NumRows {
		return 0, "", fmt.Errorf("%d rows in its row groups, %d in all", rows, m.NumRows)
	}
	return 0, "", nil
}

// schemaFits looks at the Arrow schema in the footer, if there is one.
func schemaFits(kv metadata.KeyValueMetadata) error {
	text := kv.FindValue(schemaKey)
	if text == nil {
		return nil
	}
	b, err := base64.StdEncoding.DecodeString(*text)
	if err != nil { // some leave the padding out
		b, err = base64.RawStdEncoding.DecodeString(*text)
	}
	if err != nil {
		return err
	}
	return arrowfile.SchemaFits(b)
}

func columnFits(c *metadata.ColumnChunkMetaData, size int64) error {
	off := c.DataPageOffset()
	if c.HasDictionaryPage() && c.DictionaryPageOffset() > 0 {
		off = min(off, c.DictionaryPageOffset())
	}
	n := c.TotalCompressedSize()
	switch {
	case off < int64(len(magic)) || n < 0 || off > size || n > size-off:
		return fmt.Errorf("bytes %d+%d of %d", off, n, size)
	case c.NumValues() < 0 || c.TotalUncompressedSize() < 0:
		return fmt.Errorf("%d values in %d bytes", c.NumValues(), c.TotalUncompressedSize())
	case c.FilePath() != "":
		return fmt.Errorf("it stands in another file, %q", c.FilePath())
	}
	if _, err := compress.GetCodec(c.Compression()); err != nil {
		return err
	}
	return nil
}
