package table

import (
	"fmt"
	"math"

	"github.com/apache/arrow/go/v16/arrow"
	"github.com/apache/arrow/go/v16/arrow/array"

	"labelweir/filter"
)

// isTime tells whether a type says which moment it means.
func isTime(dt arrow.DataType) bool {
	switch dt.ID() {
	case arrow.TIMESTAMP, arrow.DATE32, arrow.DATE64:
		return true
	}
	return false
}

// appendTimes appends one moment a row of arr to dst, in nanoseconds since 1970 UTC. Arrow keeps zoned timestamps in
// UTC; those without a zone are taken as UTC. Null, and moments outside of the years 1677 to 2262, are filter.NoTime.
func appendTimes(dst []int64, arr arrow.Array) ([]int64, error) {
	first := len(dst)
	switch a := arr.(type) {
	case *array.Timestamp:
		dst = scaled(dst, a.TimestampValues(), int64(a.DataType().(*arrow.TimestampType).Unit.Multiplier()))
	case *array.Date32:
		dst = scaled(dst, a.Date32Values(), 24*3600*1e9)
	case *array.Date64:
		dst = scaled(dst, a.Date64Values(), 1e6)
	case array.ExtensionArray:
		if c, _, ok := cellsOf(a); ok {
			return appendCellTimes(dst, c), nil
		}
		return appendTimes(dst, a.Storage())
	default:
		return dst, fmt.Errorf("no moment can be read from %s", arr.DataType())
	}
	if arr.NullN() > 0 {
		for i := range arr.Len() {
			if arr.IsNull(i) {
				dst[first+i] = filter.NoTime
			}
		}
	}
	return dst, nil
}

func scaled[T arrow.Timestamp | arrow.Date32 | arrow.Date64](dst []int64, src []T, unit int64) []int64 {
	limit := math.MaxInt64 / unit
	for _, v := range src {
		t := filter.NoTime
		if int64(v) <= limit && int64(v) >= -limit {
			t = int64(v) * unit
		}
		dst = append(dst, t)
	}
	return dst
}
