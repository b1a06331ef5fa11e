package spell

import (
	"math"
	"math/big"
	"strconv"

	"github.com/apache/arrow/go/v16/arrow"
	"github.com/apache/arrow/go/v16/arrow/array"

	"labelweir/connectors/internal/half"
)

// number is the speller of an array of numbers or booleans, nil for another.
func number(arr arrow.Array, json bool) Speller {
	switch a := arr.(type) {
	case *array.Boolean:
		return func(dst []byte, i int) ([]byte, bool) { return strconv.AppendBool(dst, a.Value(i)), false }
	case *array.Int8:
		return whole(a.Int8Values())
	case *array.Int16:
		return whole(a.Int16Values())
	case *array.Int32:
		return whole(a.Int32Values())
	case *array.Int64:
		return whole(a.Int64Values())
	case *array.Uint8:
		return whole(a.Uint8Values())
	case *array.Uint16:
		return whole(a.Uint16Values())
	case *array.Uint32:
		return whole(a.Uint32Values())
	case *array.Uint64:
		v := a.Uint64Values()
		return func(dst []byte, i int) ([]byte, bool) { return strconv.AppendUint(dst, v[i], 10), false }
	case *array.Duration:
		return whole(a.DurationValues())
	case *array.Float16:
		return func(dst []byte, i int) ([]byte, bool) { return binary16(dst, a.Value(i).Uint16(), json) }
	case *array.Float32:
		v := a.Float32Values()
		return func(dst []byte, i int) ([]byte, bool) { return Float(dst, float64(v[i]), 32, json) }
	case *array.Float64:
		v := a.Float64Values()
		return func(dst []byte, i int) ([]byte, bool) { return Float(dst, v[i], 64, json) }
	case *array.Decimal128:
		scale := int(a.DataType().(*arrow.Decimal128Type).Scale)
		return func(dst []byte, i int) ([]byte, bool) { return decimal(dst, a.Value(i).BigInt(), scale), false }
	case *array.Decimal256:
		scale := int(a.DataType().(*arrow.Decimal256Type).Scale)
		return func(dst []byte, i int) ([]byte, bool) { return decimal(dst, a.Value(i).BigInt(), scale), false }
	}
	return nil
}

func whole[T int8 | int16 | int32 | int64 | uint8 | uint16 | uint32 | arrow.Duration](v []T) Speller {
	return func(dst []byte, i int) ([]byte, bool) { return strconv.AppendInt(dst, int64(v[i]), 10), false }
}

// Float appends the shortest decimal that gives v back when it is read with so many bits, 32 or 64. What is no finite
// number appends nothing and is null when finite is asked for.
func Float(dst []byte, v float64, bits int, finite bool) (out []byte, null bool) {
	if math.IsNaN(v) || math.IsInf(v, 0) {
		if finite {
			return dst, true
		}
		return notFinite(dst, v), false
	}
	if v == 0 && math.Signbit(v) {
		return append(dst, "-0.0"...), false // without the point it would pass for an integer, which has no such zero
	}
	return strconv.AppendFloat(dst, v, notation(v), -1, bits), false
}

// notation: very large and very small numbers have an exponent, as Python's repr gives it to them. From 1e16 on digits
// alone would pass for an integer that fits no 64 bits.
func notation(v float64) byte {
	if x := math.Abs(v); x != 0 && (x < 1e-5 || x >= 1e16) {
		return 'e'
	}
	return 'f'
}

func notFinite(dst []byte, v float64) []byte {
	switch {
	case math.IsInf(v, 1):
		return append(dst, "inf"...)
	case math.IsInf(v, -1):
		return append(dst, "-inf"...)
	}
	return append(dst, "NaN"...)
}

// binary16 appends the shortest decimal that lies nearer to a number of 16 bits than to its neighbours.
func binary16(dst []byte, bits uint16, finite bool) ([]byte, bool) {
	v := half.Value(bits)
	if v == 0 || math.IsNaN(v) || math.IsInf(v, 0) {
		return Float(dst, v, 32, finite)
	}
	below := half.Value(bits - 1)
	room := math.Abs(v-below) / 2 // the neighbour away from zero is no nearer
	lo := len(dst)
	for digits := 1; ; digits++ {
		dst = strconv.AppendFloat(dst[:lo], v, 'g', digits, 64)
		if x, err := strconv.ParseFloat(string(dst[lo:]), 64); err == nil && math.Abs(x-v) < room {
			return strconv.AppendFloat(dst[:lo], x, notation(x), -1, 64), false
		}
	}
}

// decimal appends v·10^−scale with all its digits.
func decimal(dst []byte, v *big.Int, scale int) []byte {
	if v.Sign() < 0 {
		dst = append(dst, '-')
		v = new(big.Int).Neg(v)
	}
	lo := len(dst)
	dst = v.Append(dst, 10)
	if scale <= 0 {
		for range -scale {
			if v.Sign() != 0 {
				dst = append(dst, '0')
			}
		}
		return dst
	}
	if short := scale + 1 - (len(dst) - lo); short > 0 { // at least one digit before the point
		digits := string(dst[lo:])
		dst = dst[:lo]
		for range short {
			dst = append(dst, '0')
		}
		dst = append(dst, digits...)
	}
	point := len(dst) - scale
	dst = append(dst, 0)
	copy(dst[point+1:], dst[point:])
	dst[point] = '.'
	return dst
}
