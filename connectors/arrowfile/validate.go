package arrowfile

import (
	"errors"
	"fmt"

	"github.com/apache/arrow/go/v16/arrow"
	"github.com/apache/arrow/go/v16/arrow/array"
	"github.com/apache/arrow/go/v16/arrow/bitutil"

	"labelweir/connectors/table"
)

// validate looks at every column of a record batch for what arrow's reader takes on trust: bitmaps and offsets that
// fit their buffers, indices that fit their dictionary. Cost O(rows) for text, lists and dictionaries, O(1) otherwise.
func (r *reader) validate(rec arrow.Record) error {
	r.lastDicts, r.dicts = r.dicts, map[arrow.ArrayData]bool{}
	for i, col := range rec.Columns() {
		r.opt.Tell(r.Place(), rec.ColumnName(i))
		if err := r.validateData(col.Data()); err != nil {
			e := r.damaged("its values can't be read", err).(*table.Error)
			e.Column = rec.ColumnName(i)
			return e
		}
	}
	return nil
}

func (r *reader) validateData(d arrow.ArrayData) error {
	n := d.Len()
	if n < 0 || n > 1<<40 || d.NullN() > n {
		return fmt.Errorf("%d nulls in %d rows", d.NullN(), n)
	}
	bufs := d.Buffers()
	if len(bufs) > 0 && bufs[0] != nil && bufs[0].Len()*8 < d.Offset()+n {
		return fmt.Errorf("null bitmap of %d bytes for %d rows", bufs[0].Len(), n)
	}
	dt := d.DataType()
	if ext, ok := dt.(arrow.ExtensionType); ok {
		dt = ext.StorageType()
	}
	if err := r.validateType(dt, d); err != nil {
		return err
	}
	for _, c := range d.Children() {
		if err := r.validateData(c); err != nil {
			return err
		}
	}
	return nil
}

func (r *reader) validateType(dt arrow.DataType, d arrow.ArrayData) error {
	switch dt := dt.(type) {
	case *arrow.DictionaryType:
		return r.validateDictionary(dt, d)
	case *arrow.BooleanType:
		return wide(d, 1)
	case *arrow.StringType, *arrow.BinaryType:
		return offsetsFit[int32](d, bufLen(d, 2))
	case *arrow.LargeStringType, *arrow.LargeBinaryType:
		return offsetsFit[int64](d, bufLen(d, 2))
	case *arrow.ListType, *arrow.MapType:
		return offsetsFit[int32](d, d.Children()[0].Len())
	case *arrow.LargeListType:
		return offsetsFit[int64](d, d.Children()[0].Len())
	case *arrow.FixedSizeListType:
		if c := d.Children()[0]; float64(c.Len()) < float64(d.Offset()+d.Len())*float64(dt.Len()) || c.Len() > 1<<40 {
			return fmt.Errorf("%d elements for %d lists of %d", c.Len(), d.Len(), dt.Len())
		}
	case *arrow.StructType:
		for i, c := range d.Children() {
			if c.Len() < d.Offset()+d.Len() {
				return fmt.Errorf("field %q has %d values for %d rows", dt.Field(i).Name, c.Len(), d.Len())
			}
		}
	case arrow.UnionType:
		return unionFits(dt, d)
	case *arrow.RunEndEncodedType:
		return runsFit(d)
	case arrow.BinaryViewDataType:
		return viewsFit(d)
	case arrow.FixedWidthDataType:
		return wide(d, dt.BitWidth())
	}
	return nil
}

func bufLen(d arrow.ArrayData, i int) int {
	if bufs := d.Buffers(); i < len(bufs) && bufs[i] != nil {
		return bufs[i].Len()
	}
	return 0
}

// wide tells whether the values of a type of so many bits have room in their buffer.
func wide(d arrow.ArrayData, bits int) error {
	if bits < 0 {
		return fmt.Errorf("values of %d bits", bits)
	}
	if have := bufLen(d, 1); d.Len() > 0 && have*8 < (d.Offset()+d.Len())*bits {
		return fmt.Errorf("%d bytes for %d values of %d bits", have, d.Len(), bits)
	}
	return nil
}

// offsetsFit tells whether the offsets never fall and stay within limit.
func offsetsFit[T int32 | int64](d arrow.ArrayData, limit int) error {
	if d.Len() == 0 {
		return nil
	}
	have := arrow.GetData[T](d.Buffers()[1].Bytes())
	if len(have) < d.Offset()+d.Len()+1 {
		return fmt.Errorf("%d offsets for %d values", len(have), d.Len())
	}
	have = have[d.Offset() : d.Offset()+d.Len()+1]
	last := T(0)
	for i, o := range have {
		if o < last || int64(o) > int64(limit) {
			return fmt.Errorf("offset %d is %d after %d, of %d", i, o, last, limit)
		}
		last = o
	}
	return nil
}

// viewsFit tells whether every view points into one of its buffers.
func viewsFit(d arrow.ArrayData) error {
	if err := wide(d, arrow.ViewHeaderSizeBytes*8); err != nil || d.Len() == 0 {
		return err
	}
	views := arrow.ViewHeaderTraits.CastFromBytes(d.Buffers()[1].Bytes())
	for i, v := range views[d.Offset() : d.Offset()+d.Len()] {
		if v.Len() < 0 {
			return fmt.Errorf("view %d has length %d", i, v.Len())
		}
		if v.IsInline() {
			continue
		}
		b := int(v.BufferIndex()) + 2
		if v.BufferIndex() < 0 || b >= len(d.Buffers()) || v.BufferOffset() < 0 || int(v.BufferOffset())+v.Len() > bufLen(d, b) {
			return fmt.Errorf("view %d points outside its buffers", i)
		}
	}
	return nil
}

// validateDictionary checks the indices of valid rows, and the dictionary itself the first time it is met.
func (r *reader) validateDictionary(dt *arrow.DictionaryType, d arrow.ArrayData) error {
	dict := d.Dictionary()
	if dict == nil {
		return errors.New("dictionary column without a dictionary")
	}
	if !r.dicts[dict] && !r.lastDicts[dict] {
		if err := r.validateData(dict); err != nil {
			return fmt.Errorf("dictionary: %w", err)
		}
	}
	r.dicts[dict] = true
	index := dt.IndexType.(arrow.FixedWidthDataType)
	if err := wide(d, index.BitWidth()); err != nil || d.Len() == 0 {
		return err
	}
	switch index.BitWidth() {
	case 8:
		return indicesFit[uint8](d, dict.Len())
	case 16:
		return indicesFit[uint16](d, dict.Len())
	case 32:
		return indicesFit[uint32](d, dict.Len())
	}
	return indicesFit[uint64](d, dict.Len())
}

// indicesFit tells whether all valid rows have an index below limit. Negative ones are huge when read unsigned.
func indicesFit[T uint8 | uint16 | uint32 | uint64](d arrow.ArrayData, limit int) error {
	var valid []byte
	if d.NullN() != 0 && d.Buffers()[0] != nil {
		valid = d.Buffers()[0].Bytes()
	}
	for i, k := range arrow.GetData[T](d.Buffers()[1].Bytes())[d.Offset() : d.Offset()+d.Len()] {
		if uint64(k) >= uint64(limit) && (valid == nil || bitutil.BitIsSet(valid, d.Offset()+i)) {
			return fmt.Errorf("index %d of a dictionary of %d", k, limit)
		}
	}
	return nil
}

// unionFits tells whether every row has a known type code and, in a dense union, an offset into its child.
func unionFits(dt arrow.UnionType, d arrow.ArrayData) error {
	end := d.Offset() + d.Len()
	if d.Len() > 0 && bufLen(d, 1) < end {
		return fmt.Errorf("%d type codes for %d rows", bufLen(d, 1), d.Len())
	}
	dense := dt.Mode() == arrow.DenseMode
	if dense && d.Len() > 0 && bufLen(d, 2) < 4*end {
		return fmt.Errorf("%d bytes of offsets for %d rows", bufLen(d, 2), d.Len())
	}
	known := map[arrow.UnionTypeCode]int{}
	for k, c := range dt.TypeCodes() {
		known[c] = k
		if !dense && d.Children()[k].Len() < end {
			return fmt.Errorf("child %d has %d values for %d rows", k, d.Children()[k].Len(), end)
		}
	}
	for i := d.Offset(); i < end; i++ {
		k, ok := known[int8(d.Buffers()[1].Bytes()[i])]
		if !ok {
			return fmt.Errorf("type code %d is unknown", int8(d.Buffers()[1].Bytes()[i]))
		}
		if dense {
			if at := arrow.Int32Traits.CastFromBytes(d.Buffers()[2].Bytes())[i]; at < 0 || int(at) >= d.Children()[k].Len() {
				return fmt.Errorf("offset %d of a child with %d values", at, d.Children()[k].Len())
			}
		}
	}
	return nil
}

// runsFit tells whether the run ends rise and cover all rows.
func runsFit(d arrow.ArrayData) error {
	ends, values := d.Children()[0], d.Children()[1]
	if err := wide(ends, ends.DataType().(arrow.FixedWidthDataType).BitWidth()); err != nil {
		return err
	}
	if ends.Len() != values.Len() {
		return fmt.Errorf("%d run ends for %d values", ends.Len(), values.Len())
	}
	arr := array.MakeFromData(ends)
	defer arr.Release()
	var list []int64
	switch a := arr.(type) {
	case *array.Int16:
		list = widened(a.Int16Values())
	case *array.Int32:
		list = widened(a.Int32Values())
	case *array.Int64:
		list = a.Int64Values()
	default:
		return fmt.Errorf("run ends of type %s", arr.DataType())
	}
	last := int64(0)
	for _, e := range list {
		if e <= last {
			return fmt.Errorf("run end %v after %v", e, last)
		}
		last = e
	}
	if last < int64(d.Offset()+d.Len()) {
		return fmt.Errorf("runs end at %v of %d rows", last, d.Offset()+d.Len())
	}
	return nil
}

func widened[T int16 | int32](src []T) []int64 {
	out := make([]int64, len(src))
	for i, v := range src {
		out[i] = int64(v)
	}
	return out
}
