package parquet

import (
	"context"
	"errors"
	"fmt"
	"io"
	"slices"
	"unicode/utf8"

	"github.com/apache/arrow/go/v16/arrow"
	"github.com/apache/arrow/go/v16/arrow/array"
	"github.com/apache/arrow/go/v16/arrow/memory"
	"github.com/apache/arrow/go/v16/parquet"
	"github.com/apache/arrow/go/v16/parquet/file"
	"github.com/apache/arrow/go/v16/parquet/pqarrow"

	"labelweir/connectors/arrowfile"
	"labelweir/connectors/internal/capped"
	"labelweir/connectors/table"
)

// A record batch has at most mostRows rows, and fewer when these take more than mostBytes, but leastRows.
const (
	mostRows  = 16384
	leastRows = 64
	mostBytes = 16 << 20
)

// reader reads an open file. It implements table.Reader.
type reader struct {
	path   string
	opt    table.ReadOptions
	size   int64
	mem    memory.Allocator
	pf     *file.Reader
	fr     *pqarrow.FileReader
	schema *arrow.Schema
	fixed  map[int]*arrow.FixedSizeListType // see loosen

	group  int                     // row group being read, counted from 1
	left   int64                   // rows of it still to come
	step   int64                   // rows of a record batch of it
	fields []*pqarrow.ColumnReader // of it, one a field
	seen   int64                   // bytes of the row groups before
}

// newReader reads the footer.
func newReader(f table.File, opt table.ReadOptions) (r *reader, err error) {
	r = &reader{path: f.Path, opt: opt, size: f.Size, mem: capped.New(opt.Memory, f.Size)}
	defer func() {
		if p := recover(); p != nil {
			err = r.damaged("its footer makes no sense", "", table.Caught(p))
		}
		if err != nil {
			r = nil
		}
	}()
	head := make([]byte, len(magic))
	if n, err := f.ReadAt(head, 0); n < len(head) || string(head) != magic {
		if err == io.EOF {
			err = nil
		}
		return nil, table.At(r.Place(), table.ErrUnreadable, "is no Parquet file", "check that the path is the right one", err)
	}
	if err := footerFits(f); err != nil {
		if errors.Is(err, errEncrypted) {
			return nil, table.At(r.Place(), table.ErrUnreadable, errEncrypted.Error(), "write it without encryption", nil)
		}
		return nil, r.damaged("its footer can't be read", "", err)
	}
	return r, r.open(f)
}

func (r *reader) open(f table.File) error {
	props := parquet.NewReaderProperties(r.mem)
	props.BufferedStreamEnabled = true // else a row group is read whole
	props.BufferSize = 1 << 16
	var err error
	if r.pf, err = file.NewParquetReader(io.NewSectionReader(f, 0, f.Size), file.WithReadProps(props)); err != nil {
		return r.damaged("its footer can't be read", "", err)
	}
	if group, column, err := groupsFit(r.pf.MetaData(), f.Size); err != nil {
		r.group = group
		return r.damaged("its footer makes no sense", column, err)
	}
	if err := schemaFits(r.pf.MetaData().KeyValueMetadata()); err != nil {
		return r.damaged("its schema can't be read", "", err)
	}
	if r.fr, err = pqarrow.NewFileReader(r.pf, pqarrow.ArrowReadProperties{BatchSize: mostRows}, r.mem); err != nil {
		return r.damaged("its schema can't be read", "", err)
	}
	if r.schema, err = r.fr.Schema(); err != nil {
		return r.damaged("its schema can't be read", "", err)
	}
	if m := r.pf.MetaData().KeyValueMetadata(); !areText(m.Keys()) || !areText(m.Values()) {
		return r.damaged("its metadata is not UTF-8", "", nil)
	}
	r.schema = tidied(r.schema, r.fr.Manifest.OriginSchema)
	r.fixed = r.loosen()
	return nil
}

// areText tells whether all of the list are UTF-8, as the format wants it.
func areText(list []string) bool {
	return !slices.ContainsFunc(list, func(s string) bool { return !utf8.ValidString(s) })
}

func (r *reader) damaged(what, column string, err error) error {
	e := table.At(r.Place(), table.ErrUnreadable, what, "the file is damaged or cut short: write it again", table.Plain(err))
	e.Column = column
	return e
}

// Schema implements table.Reader.
func (r *reader) Schema() *arrow.Schema { return r.schema }

// Place implements table.Reader.
func (r *reader) Place() table.Place { return table.Place{Path: r.path, Group: r.group} }

// Progress implements table.Reader: row groups count as read bit by bit.
func (r *reader) Progress() (done, size int64) {
	done = r.seen
	if r.group > 0 && r.left > 0 {
		rg := r.pf.MetaData().RowGroup(r.group - 1)
		done += int64(float64(r.groupBytes(r.group-1)) * float64(rg.NumRows()-r.left) / float64(rg.NumRows()))
	}
	return min(done, r.size), r.size
}

// groupBytes is how many bytes of the file a row group takes.
func (r *reader) groupBytes(g int) (sum int64) {
	rg := r.pf.MetaData().RowGroup(g)
	for c := range rg.NumColumns() {
		if col, err := rg.ColumnChunk(c); err == nil {
			sum += col.TotalCompressedSize()
		}
	}
	return sum
}

// Next implements table.Reader.
func (r *reader) Next() (arrow.Record, error) {
	for r.left == 0 {
		if r.group == r.pf.NumRowGroups() {
			r.drop()
			return nil, io.EOF
		}
		if err := r.nextGroup(); err != nil {
			return nil, err
		}
	}
	n := min(r.left, r.step)
	cols := make([]arrow.Array, 0, len(r.fields))
	defer func() {
		for _, c := range cols {
			c.Release()
		}
	}()
	for i := range r.fields {
		col, err := r.column(i, n)
		if err != nil {
			return nil, r.damaged("its values can't be read", r.schema.Field(i).Name, err)
		}
		cols = append(cols, col)
	}
	r.left -= n
	return array.NewRecord(r.schema, cols, n), nil
}

// nextGroup goes on to the next row group.
func (r *reader) nextGroup() error {
	r.drop()
	if r.group > 0 {
		r.seen += r.groupBytes(r.group - 1)
	}
	r.group++
	r.opt.Tell(r.Place(), "")
	rg := r.pf.MetaData().RowGroup(r.group - 1)
	if r.left = rg.NumRows(); r.left == 0 {
		return nil
	}
	r.step = max(leastRows, min(mostRows, mostBytes/max(1, rg.TotalByteSize()/r.left)))
	leaves := map[int]bool{}
	for c := range r.pf.MetaData().Schema.NumColumns() {
		leaves[c] = true
	}
	for i := range r.schema.NumFields() {
		field, err := r.field(i, leaves)
		if err != nil {
			return r.damaged("the column can't be read", r.schema.Field(i).Name, err)
		}
		r.fields = append(r.fields, field)
	}
	return nil
}

// field opens a field of the row group.
func (r *reader) field(i int, leaves map[int]bool) (field *pqarrow.ColumnReader, err error) {
	defer func() {
		if p := recover(); p != nil {
			field, err = nil, table.Caught(p)
		}
	}()
	r.opt.Tell(r.Place(), r.schema.Field(i).Name)
	if err := r.probe(i); err != nil {
		return nil, err
	}
	field, err = r.fr.GetFieldReader(context.Background(), i, leaves, []int{r.group - 1})
	if err == nil && field == nil {
		err = errors.New("it has no values")
	}
	return field, err
}

// column reads n values of a field.
func (r *reader) column(i int, n int64) (arr arrow.Array, err error) {
	defer func() {
		if p := recover(); p != nil {
			arr, err = nil, table.Caught(p)
		}
	}()
	r.opt.Tell(r.Place(), r.schema.Field(i).Name)
	chunks, err := r.fields[i].NextBatch(n)
	if err != nil {
		return nil, err
	}
	defer chunks.Release()
	if int64(chunks.Len()) != n {
		return nil, fmt.Errorf("%d values instead of %d", chunks.Len(), n)
	}
	dt := r.fr.Manifest.Fields[i].Field.Type
	if !arrow.TypeEqual(chunks.DataType(), dt) {
		return nil, fmt.Errorf("values of type %s instead of %s", chunks.DataType(), dt)
	}
	if arr, err = r.single(chunks); err != nil {
		return nil, err
	}
	defer arr.Release()
	if err := arrowfile.ValuesFit(arr); err != nil {
		return nil, err
	}
	if r.fixed[i] != nil {
		return tighten(arr.(*array.List), r.fixed[i], r.mem)
	}
	return as(arr, r.schema.Field(i).Type), nil
}

// single makes one array of chunks; there are several when dictionaries change within a row group.
func (r *reader) single(chunks *arrow.Chunked) (arrow.Array, error) {
	if list := chunks.Chunks(); len(list) > 1 {
		return array.Concatenate(list, r.mem)
	}
	arr := chunks.Chunk(0)
	arr.Retain()
	return arr, nil
}

// drop gives the fields of the row group back.
func (r *reader) drop() {
	for _, f := range r.fields {
		f.Release()
	}
	r.fields = r.fields[:0]
}

// Close implements table.Reader.
func (r *reader) Close() error {
	r.drop()
	return nil
}
