package arrowfile

import (
	"fmt"

	"github.com/apache/arrow/go/v16/arrow"
	"github.com/apache/arrow/go/v16/arrow/array"
	"github.com/apache/arrow/go/v16/arrow/memory"

	"labelweir/connectors/table"
)

// grower keeps one dictionary of an Arrow file, which may grow but not change: the dictionaries of later record batches
// become part of it, and their indices are moved.
type grower struct {
	dict  arrow.Array      // what the file has so far
	codes map[string]int32 // index of each value; made when the first other dictionary comes

	other arrow.ArrayData // the dictionary that moved belongs to
	moved []int32         // index in dict of each of its values
}

// adapt gives a column indices into the dictionary of the file. The caller releases it.
func (g *grower) adapt(name string, col *array.Dictionary, mem memory.Allocator) (arrow.Array, error) {
	dict := col.Dictionary()
	switch {
	case g.dict == nil:
		g.dict = dict
		dict.Retain()
		fallthrough
	case dict.Data() == g.dict.Data():
		col.Retain()
		return col, nil
	case dict.Data() != g.other:
		if err := g.take(dict, mem); err != nil {
			return nil, err
		}
	}
	dt := col.DataType().(*arrow.DictionaryType)
	if most := mostIndex(dt.IndexType); int64(g.dict.Len())-1 > most {
		return nil, &table.Error{Column: name, What: fmt.Sprintf("its dictionary grows to %d values, more than its %s indices tell apart", g.dict.Len(), dt.IndexType),
			Do: "write an Arrow stream, whose dictionaries may change", Kind: table.ErrColumn}
	}
	b := array.NewBuilder(mem, dt.IndexType)
	defer b.Release()
	b.Reserve(col.Len())
	for i := range col.Len() {
		if col.IsNull(i) {
			b.AppendNull()
		} else {
			appendIndex(b, g.moved[col.GetValueIndex(i)])
		}
	}
	indices := b.NewArray()
	defer indices.Release()
	return array.NewDictionaryArray(dt, indices, g.dict), nil
}

// take adds the values of another dictionary that are new.
func (g *grower) take(dict arrow.Array, mem memory.Allocator) error {
	if g.codes == nil {
		g.codes = map[string]int32{}
		for i := range g.dict.Len() {
			if _, ok := g.codes[valueKey(g.dict, i)]; !ok {
				g.codes[valueKey(g.dict, i)] = int32(i)
			}
		}
	}
	parts := []arrow.Array{g.dict}
	g.moved = g.moved[:0]
	next := int32(g.dict.Len())
	for i := range dict.Len() {
		key := valueKey(dict, i)
		code, ok := g.codes[key]
		if !ok {
			code, g.codes[key] = next, next
			next++
			one := array.NewSlice(dict, int64(i), int64(i+1))
			defer one.Release()
			parts = append(parts, one)
		}
		g.moved = append(g.moved, code)
	}
	if g.other != nil {
		g.other.Release()
	}
	g.other = dict.Data()
	g.other.Retain()
	if len(parts) == 1 {
		return nil
	}
	all, err := array.Concatenate(parts, mem)
	if err != nil {
		return err
	}
	g.dict.Release()
	g.dict = all
	return nil
}

// valueKey tells a dictionary's values apart.
func valueKey(dict arrow.Array, i int) string {
	if dict.IsNull(i) {
		return "null"
	}
	return "=" + dict.ValueStr(i)
}

// mostIndex is the largest index of a type, as far as dictionaries here go.
func mostIndex(dt arrow.DataType) int64 {
	switch dt.ID() {
	case arrow.INT8:
		return 1<<7 - 1
	case arrow.UINT8:
		return 1<<8 - 1
	case arrow.INT16:
		return 1<<15 - 1
	case arrow.UINT16:
		return 1<<16 - 1
	}
	return 1<<31 - 1
}

func appendIndex(b array.Builder, v int32) {
	switch b := b.(type) {
	case *array.Int8Builder:
		b.UnsafeAppend(int8(v))
	case *array.Uint8Builder:
		b.UnsafeAppend(uint8(v))
	case *array.Int16Builder:
		b.UnsafeAppend(int16(v))
	case *array.Uint16Builder:
		b.UnsafeAppend(uint16(v))
	case *array.Int32Builder:
		b.UnsafeAppend(v)
	case *array.Uint32Builder:
		b.UnsafeAppend(uint32(v))
	case *array.Int64Builder:
		b.UnsafeAppend(int64(v))
	case *array.Uint64Builder:
		b.UnsafeAppend(uint64(v))
	}
}

func (g *grower) release() {
	if g.dict != nil {
		g.dict.Release()
	}
	if g.other != nil {
		g.other.Release()
	}
}

// growing adapts the dictionaries of a record batch to those of the file. The caller releases it.
func (w *writer) growing(rec arrow.Record) (arrow.Record, error) {
	cols := make([]arrow.Array, 0, rec.NumCols())
	defer func() {
		for _, c := range cols {
			c.Release()
		}
	}()
	for i, c := range rec.Columns() {
		d, ok := c.(*array.Dictionary)
		if !ok {
			c.Retain()
			cols = append(cols, c)
			continue
		}
		if w.growers[i] == nil {
			w.growers[i] = &grower{}
		}
		col, err := w.growers[i].adapt(rec.ColumnName(i), d, w.mem)
		if err != nil {
			return nil, err
		}
		cols = append(cols, col)
	}
	return array.NewRecord(rec.Schema(), cols, rec.NumRows()), nil
}
