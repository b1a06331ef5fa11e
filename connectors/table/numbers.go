package table

import (
	"fmt"
	"math"
	"slices"

	"github.com/apache/arrow/go/v16/arrow"
	"github.com/apache/arrow/go/v16/arrow/array"

	"labelweir/connectors/internal/half"
)

// isNumber tells whether values of a type are read as numbers. Durations count in their own unit.
func isNumber(dt arrow.DataType) bool {
	switch dt.ID() {
	case arrow.BOOL, arrow.DURATION, arrow.DECIMAL128, arrow.DECIMAL256:
		return true
	}
	return arrow.IsInteger(dt.ID()) || arrow.IsFloating(dt.ID())
}

// appendNumbers appends one float64 a row of arr to dst: false is 0, true 1, null NaN. arr is of a type for which
// isNumber holds, or a dictionary of one.
func appendNumbers(dst []float64, arr arrow.Array) ([]float64, error) {
	first := len(dst)
	switch a := arr.(type) {
	case *array.Float64:
		dst = append(dst, a.Float64Values()...)
	case *array.Float32:
		dst = widen(dst, a.Float32Values())
	case *array.Float16:
		for _, v := range a.Values() {
			dst = append(dst, half.Value(v.Uint16()))
		}
	case *array.Int8:
		dst = widen(dst, a.Int8Values())
	case *array.Int16:
		dst = widen(dst, a.Int16Values())
	case *array.Int32:
		dst = widen(dst, a.Int32Values())
	case *array.Int64:
		dst = widen(dst, a.Int64Values())
	case *array.Uint8:
		dst = widen(dst, a.Uint8Values())
	case *array.Uint16:
		dst = widen(dst, a.Uint16Values())
	case *array.Uint32:
		dst = widen(dst, a.Uint32Values())
	case *array.Uint64:
		dst = widen(dst, a.Uint64Values())
	case *array.Duration:
		dst = widen(dst, a.DurationValues())
	case *array.Boolean:
		for i := range a.Len() {
			v := 0.
			if a.Value(i) {
				v = 1
			}
			dst = append(dst, v)
		}
	case *array.Decimal128:
		scale := a.DataType().(*arrow.Decimal128Type).Scale
		for i := range a.Len() {
			dst = append(dst, a.Value(i).ToFloat64(scale))
		}
	case *array.Decimal256:
		scale := a.DataType().(*arrow.Decimal256Type).Scale
		for i := range a.Len() {
			dst = append(dst, a.Value(i).ToFloat64(scale))
		}
	case *array.Dictionary:
		return appendIndexed(dst, a)
	case array.ExtensionArray:
		if c, means, ok := cellsOf(a); ok {
			return appendCellNumbers(dst, c, means)
		}
		return appendNumbers(dst, a.Storage())
	default:
		return dst, fmt.Errorf("no number can be read from %s", arr.DataType())
	}
	blank(dst[first:], arr, 1)
	return dst, nil
}

func widen[T int8 | int16 | int32 | int64 | uint8 | uint16 | uint32 | uint64 | float32 | arrow.Duration](dst []float64, src []T) []float64 {
	n := len(dst)
	dst = slices.Grow(dst, len(src))[:n+len(src)]
	for i, v := range src {
		dst[n+i] = float64(v)
	}
	return dst
}

// blank puts NaN into the size numbers of each row that is null.
func blank(vals []float64, arr arrow.Array, size int) {
	if arr.NullN() == 0 {
		return
	}
	for i := range arr.Len() {
		if arr.IsNull(i) {
			for j := range size {
				vals[i*size+j] = math.NaN()
			}
		}
	}
}

// appendIndexed appends the numbers of a dictionary's values, row by row.
func appendIndexed(dst []float64, a *array.Dictionary) ([]float64, error) {
	levels, err := appendNumbers(nil, a.Dictionary())
	if err != nil {
		return dst, err
	}
	for i := range a.Len() {
		if a.IsNull(i) {
			dst = append(dst, math.NaN())
		} else {
			dst = append(dst, levels[a.GetValueIndex(i)])
		}
	}
	return dst, nil
}

// appendVectors appends size numbers a row of a fixed-size list; a null list is all NaN.
func appendVectors(dst []float64, arr arrow.Array) ([]float64, error) {
	if ext, ok := arr.(array.ExtensionArray); ok {
		arr = ext.Storage()
	}
	list, ok := arr.(*array.FixedSizeList)
	if !ok {
		return dst, fmt.Errorf("no vector can be read from %s", arr.DataType())
	}
	size := int(list.DataType().(*arrow.FixedSizeListType).Len())
	lo := list.Data().Offset()
	values := array.NewSlice(list.ListValues(), int64(lo*size), int64((lo+list.Len())*size))
	defer values.Release()
	first := len(dst)
	dst, err := appendNumbers(dst, values)
	if err == nil {
		blank(dst[first:], list, size)
	}
	return dst, err
}
