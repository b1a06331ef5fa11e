package table

import (
	"fmt"
	"math"

	"github.com/apache/arrow/go/v16/arrow"
	"github.com/apache/arrow/go/v16/arrow/array"
	"github.com/apache/arrow/go/v16/arrow/memory"

	"labelweir/connectors/internal/cell"
	"labelweir/filter"
)

// meant is the type that values of a type are read as where numbers and times are wanted: what cells mean, the storage of
// other extensions, else the type itself.
func meant(dt arrow.DataType) arrow.DataType {
	if c, ok := dt.(*CellType); ok {
		return c.Means
	}
	return plain(dt)
}

// cells are the texts of a column of cells; they are valid as long as the array.
type cells struct {
	arr     *array.String
	text    []byte
	offsets []int32
}

// cellsOf gives the cells of an array, and false when it has none.
func cellsOf(arr arrow.Array) (c cells, means arrow.DataType, ok bool) {
	dt, ok := arr.DataType().(*CellType)
	if !ok {
		return c, nil, false
	}
	c.arr = arr.(array.ExtensionArray).Storage().(*array.String)
	if c.arr.Len() > 0 {
		c.text, c.offsets = c.arr.ValueBytes(), c.arr.ValueOffsets()
	}
	return c, dt.Means, true
}

// at is the text of row i, nil when there is none.
func (c *cells) at(i int) []byte {
	if c.arr.IsNull(i) {
		return nil
	}
	base := c.offsets[0]
	return c.text[c.offsets[i]-base : c.offsets[i+1]-base]
}

// appendCellNumbers appends the number that each cell means, NaN where it means none.
func appendCellNumbers(dst []float64, c cells, means arrow.DataType) ([]float64, error) {
	for i := range c.arr.Len() {
		var v float64
		var ok bool
		switch b := c.at(i); means.ID() {
		case arrow.BOOL:
			var yes bool
			if yes, ok = cell.Bool(b); yes {
				v = 1
			}
		case arrow.INT64, arrow.FLOAT64:
			v, ok = cell.Number(b)
		default:
			return dst, fmt.Errorf("no number can be read from %s", means)
		}
		if !ok {
			v = math.NaN()
		}
		dst = append(dst, v)
	}
	return dst, nil
}

// appendCellTimes appends the moment that each cell means, filter.NoTime where it means none.
func appendCellTimes(dst []int64, c cells) []int64 {
	for i := range c.arr.Len() {
		t := filter.NoTime
		if seconds, nanos, _, style := cell.Moment(c.at(i)); style != cell.NoMoment {
			if limit := int64(math.MaxInt64 / 1_000_000_000); seconds < limit && seconds > -limit {
				t = seconds*1e9 + int64(nanos)
			}
		}
		dst = append(dst, t)
	}
	return dst
}

// meansAll tells whether every cell has no value or means one of the type that may stand for its text: of a number the
// value must have all digits, so that codes such as 007 stay text.
func meansAll(c cells, means arrow.DataType) bool {
	for i := range c.arr.Len() {
		b := c.at(i)
		if b == nil || cell.Missing(b) {
			continue
		}
		ok := false
		switch dt := means.(type) {
		case *arrow.BooleanType:
			_, ok = cell.Bool(b)
		case *arrow.Int64Type:
			ok = cell.ExactInt(b)
		case *arrow.Float64Type:
			ok = cell.ExactNumber(b)
		case *arrow.TimestampType:
			_, ok = moment(b, dt)
		}
		if !ok {
			return false
		}
	}
	return true
}

// moment is what a cell means in the unit of a timestamp; false when it means none, or one that the unit can't hold.
func moment(b []byte, dt *arrow.TimestampType) (arrow.Timestamp, bool) {
	seconds, nanos, digits, style := cell.Moment(b)
	per := int64(dt.Unit.Multiplier())
	unit := int64(1e9) / per
	if style == cell.NoMoment || (style == cell.Zoned) != (dt.TimeZone != "") || digits > 6 && dt.Unit != arrow.Nanosecond {
		return 0, false
	}
	if limit := math.MaxInt64 / unit; seconds >= limit || seconds <= -limit {
		return 0, false
	}
	return arrow.Timestamp(seconds*unit + int64(nanos)/per), true
}

// valued makes values of cells; those that mean none are null.
func valued(c cells, means arrow.DataType, mem memory.Allocator) arrow.Array {
	b := array.NewBuilder(mem, means)
	defer b.Release()
	b.Reserve(c.arr.Len())
	for i := range c.arr.Len() {
		text, ok := c.at(i), false
		switch b := b.(type) {
		case *array.BooleanBuilder:
			var v bool
			if v, ok = cell.Bool(text); ok {
				b.UnsafeAppend(v)
			}
		case *array.Int64Builder:
			var v int64
			if v, ok = cell.Int(text); ok {
				b.UnsafeAppend(v)
			}
		case *array.Float64Builder:
			var v float64
			if v, ok = cell.Number(text); ok {
				b.UnsafeAppend(v)
			}
		case *array.TimestampBuilder:
			var v arrow.Timestamp
			if v, ok = moment(text, means.(*arrow.TimestampType)); ok {
				b.UnsafeAppend(v)
			}
		}
		if !ok {
			b.AppendNull()
		}
	}
	return b.NewArray()
}
