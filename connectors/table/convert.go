package table

import (
	"errors"
	"io"

	"github.com/apache/arrow/go/v16/arrow"
	"github.com/apache/arrow/go/v16/arrow/array"
	"github.com/apache/arrow/go/v16/arrow/memory"
)

// conversion turns rows of the input into those of an output of another format. Hidden columns of raw bytes go; cells
// become the values that they mean when all cells of the column mean one, else plain text.
type conversion struct {
	schema  *arrow.Schema // of the output, without tags
	columns []converted
}

type converted struct {
	index  int
	means  arrow.DataType // of cells that become values
	undone bool           // cells that become text
}

// newConversion is the conversion of rows of src for a format; nil when they stay as they are.
func newConversion(src *Source, to *Format) (*conversion, error) {
	schema := src.in.schema
	raw := RawIndex(schema)
	if raw >= 0 && rawFormat(schema) == to.Name {
		return nil, nil
	}
	settled, err := src.settle()
	if err != nil || raw < 0 && len(settled) == 0 {
		return nil, err
	}
	c := &conversion{}
	var fields []arrow.Field
	for i, f := range schema.Fields() {
		if i == raw {
			continue
		}
		col := converted{index: i}
		if whole, ok := settled[i]; ok {
			col.undone = !whole
			if whole {
				col.means = f.Type.(*CellType).Means
				f.Type = col.means
			} else {
				f.Type = arrow.BinaryTypes.String
			}
			f.Nullable = true
		}
		fields, c.columns = append(fields, f), append(c.columns, col)
	}
	meta := schema.Metadata()
	c.schema = arrow.NewSchema(fields, &meta)
	return c, nil
}

// bare is rec without the hidden column, if it has one: the last. The caller releases it.
func (c *conversion) bare(rec arrow.Record) arrow.Record {
	cols := rec.Columns()
	raw := RawIndex(rec.Schema())
	if raw != len(cols)-1 {
		rec.Retain()
		return rec
	}
	return array.NewRecord(arrow.NewSchema(rec.Schema().Fields()[:raw], nil), cols[:raw], rec.NumRows())
}

// apply gives the columns of rows for the output; the caller releases them.
func (c *conversion) apply(rec arrow.Record, mem memory.Allocator) []arrow.Array {
	cols := make([]arrow.Array, len(c.columns))
	for k, col := range c.columns {
		arr := rec.Column(col.index)
		switch {
		case col.means != nil:
			texts, means, _ := cellsOf(arr)
			arr = valued(texts, means, mem)
		case col.undone:
			arr = arr.(array.ExtensionArray).Storage()
			arr.Retain()
		default:
			arr.Retain()
		}
		cols[k] = arr
	}
	return cols
}

// settle reads all files once and tells for each column of cells whether all of them mean values of its type. Types were
// inferred from the first rows; the last may say otherwise.
func (s *Source) settle() (map[int]bool, error) {
	settled := map[int]bool{}
	for i, f := range s.in.schema.Fields() {
		if _, ok := f.Type.(*CellType); ok {
			settled[i] = true
		}
	}
	if len(settled) == 0 {
		return nil, nil
	}
	opt := s.opt
	if opt.Unreadable != nil {
		opt.Unreadable = func(Unreadable) error { return nil }
	}
	in, err := openInput(s.in.files, s.in.text, s.in.schema, opt)
	if err != nil {
		return nil, err
	}
	for {
		rec, err := in.next()
		if err == io.EOF {
			return settled, in.close()
		}
		if err != nil {
			return nil, errors.Join(err, in.close())
		}
		for i, whole := range settled {
			if whole {
				texts, means, _ := cellsOf(rec.Column(i))
				settled[i] = meansAll(texts, means)
			}
		}
		rec.Release()
	}
}
