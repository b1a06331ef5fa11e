package table_test

import (
	"fmt"
	"math/rand/v2"

	"github.com/apache/arrow/go/v16/arrow"
	"github.com/apache/arrow/go/v16/arrow/array"
	"github.com/apache/arrow/go/v16/arrow/decimal128"
	"github.com/apache/arrow/go/v16/arrow/decimal256"
	"github.com/apache/arrow/go/v16/arrow/float16"
	"github.com/apache/arrow/go/v16/arrow/memory"
)

// flatTypes are the Arrow types without children that files can hold; parquet leaves out those that Parquet has not.
func flatTypes(parquet bool) []arrow.DataType {
	p, f, b := arrow.PrimitiveTypes, arrow.FixedWidthTypes, arrow.BinaryTypes
	list := []arrow.DataType{
		f.Boolean, p.Int8, p.Int16, p.Int32, p.Int64, p.Uint8, p.Uint16, p.Uint32, p.Uint64, f.Float16, p.Float32, p.Float64,
		b.String, b.LargeString, b.Binary, b.LargeBinary, &arrow.FixedSizeBinaryType{ByteWidth: 5},
		&arrow.Decimal128Type{Precision: 21, Scale: 4}, &arrow.Decimal256Type{Precision: 60, Scale: 7},
		p.Date32, f.Time32ms, f.Time64us, f.Time64ns, f.Timestamp_ms, f.Timestamp_us, f.Timestamp_ns,
		&arrow.TimestampType{Unit: arrow.Microsecond}, &arrow.TimestampType{Unit: arrow.Nanosecond, TimeZone: "Europe/Oslo"},
		&arrow.TimestampType{Unit: arrow.Millisecond, TimeZone: "America/St_Johns"},
	}
	if !parquet {
		list = append(list, arrow.Null, p.Date64, f.Time32s, f.Timestamp_s, f.Duration_s, f.Duration_ns, f.MonthDayNanoInterval) // Python has no values for the other two intervals
	}
	return list
}

// randomType draws a type with at most so many levels of children.
func randomType(r *rand.Rand, depth int, parquet bool) arrow.DataType {
	flat := flatTypes(parquet)
	if depth == 0 || r.IntN(3) > 0 {
		return flat[r.IntN(len(flat))]
	}
	child := func() arrow.DataType { return randomType(r, depth-1, parquet) }
	switch r.IntN(5) {
	case 0:
		return arrow.ListOf(child())
	case 1:
		return arrow.StructOf(arrow.Field{Name: "a", Type: child(), Nullable: true}, arrow.Field{Name: "b", Type: child(), Nullable: true})
	case 2:
		return arrow.MapOf(arrow.BinaryTypes.String, child())
	case 3:
		if parquet {
			return arrow.ListOf(child())
		}
		return arrow.LargeListOf(child())
	}
	if parquet && depth < 2 { // within others the library does not write a null among them
		return flat[r.IntN(len(flat))]
	}
	return arrow.FixedSizeListOf(int32(1+r.IntN(3)), flat[r.IntN(len(flat))])
}

// appendRandom appends a value, null once in five times.
func appendRandom(b array.Builder, r *rand.Rand) {
	if r.IntN(5) == 0 {
		b.AppendNull()
		return
	}
	small := r.Int64N(1 << 40)
	switch b := b.(type) {
	case *array.NullBuilder:
		b.AppendNull()
	case *array.BooleanBuilder:
		b.Append(r.IntN(2) == 0)
	case *array.Int8Builder:
		b.Append(int8(r.Uint32()))
	case *array.Int16Builder:
		b.Append(int16(r.Uint32()))
	case *array.Int32Builder:
		b.Append(int32(r.Uint32()))
	case *array.Int64Builder:
		b.Append(int64(r.Uint64()))
	case *array.Uint8Builder:
		b.Append(uint8(r.Uint32()))
	case *array.Uint16Builder:
		b.Append(uint16(r.Uint32()))
	case *array.Uint32Builder:
		b.Append(r.Uint32())
	case *array.Uint64Builder:
		b.Append(r.Uint64())
	case *array.Float16Builder:
		b.Append(float16.New(float32(r.NormFloat64())))
	case *array.Float32Builder:
		b.Append(float32(r.NormFloat64()))
	case *array.Float64Builder:
		b.Append(r.NormFloat64() * 1e200)
	case *array.StringBuilder:
		b.Append(randomText(r))
	case *array.LargeStringBuilder:
		b.Append(randomText(r))
	case *array.BinaryBuilder:
		b.Append([]byte{byte(r.Uint32()), 0, byte(r.Uint32())}[:r.IntN(4)])
	case *array.FixedSizeBinaryBuilder:
		b.Append([]byte{byte(r.Uint32()), 1, 2, 0, 255})
	case *array.Decimal128Builder:
		b.Append(decimal128.FromI64(small - 1<<39))
	case *array.Decimal256Builder:
		b.Append(decimal256.FromI64(small - 1<<39))
	case *array.Date32Builder:
		b.Append(arrow.Date32(r.IntN(60000) - 20000))
	case *array.Date64Builder:
		b.Append(arrow.Date64(int64(r.IntN(60000)-20000) * 86400000))
	case *array.Time32Builder:
		b.Append(arrow.Time32(r.IntN(86400)))
	case *array.Time64Builder:
		b.Append(arrow.Time64(r.Int64N(86400_000_000)))
	case *array.TimestampBuilder:
		if b.Type().(*arrow.TimestampType).Unit == arrow.Second {
			small %= 1 << 32 // Python's years end with 9999
		}
		b.Append(arrow.Timestamp(small))
	case *array.DurationBuilder:
		b.Append(arrow.Duration(small % (1 << 33)))
	case *array.MonthDayNanoIntervalBuilder:
		b.Append(arrow.MonthDayNanoInterval{Months: int32(r.IntN(99)), Days: int32(r.IntN(99)), Nanoseconds: small})
	default:
		appendNested(b, r)
	}
}

func appendNested(b array.Builder, r *rand.Rand) {
	several := func(v array.Builder) {
		for range r.IntN(4) {
			appendRandom(v, r)
		}
	}
	switch b := b.(type) {
	case *array.ListBuilder:
		b.Append(true)
		several(b.ValueBuilder())
	case *array.LargeListBuilder:
		b.Append(true)
		several(b.ValueBuilder())
	case *array.FixedSizeListBuilder:
		b.Append(true)
		for range b.Type().(*arrow.FixedSizeListType).Len() {
			appendRandom(b.ValueBuilder(), r)
		}
	case *array.StructBuilder:
		b.Append(true)
		for i := range b.NumField() {
			appendRandom(b.FieldBuilder(i), r)
		}
	case *array.MapBuilder:
		b.Append(true)
		for k := range r.IntN(3) {
			b.KeyBuilder().(*array.StringBuilder).Append(fmt.Sprint("k", k))
			appendRandom(b.ItemBuilder(), r)
		}
	default:
		panic(fmt.Sprintf("no values for %T", b))
	}
}

func randomText(r *rand.Rand) string {
	words := []string{"", "Gala", "ø", "a,b", "\"quoted\"", "two\nlines", " blank ", "NULL", "日本", "'"}
	return words[r.IntN(len(words))]
}

// randomColumn makes so many rows of a type; one text column in three is a dictionary.
func randomColumn(r *rand.Rand, dt arrow.DataType, rows int) arrow.Array {
	b := array.NewBuilder(memory.DefaultAllocator, dt)
	defer b.Release()
	for range rows {
		appendRandom(b, r)
	}
	return b.NewArray()
}

// randomDictionary makes so many rows of a dictionary of text.
func randomDictionary(r *rand.Rand, rows int) arrow.Array {
	dt := &arrow.DictionaryType{IndexType: arrow.PrimitiveTypes.Int32, ValueType: arrow.BinaryTypes.String}
	b := array.NewDictionaryBuilder(memory.DefaultAllocator, dt).(*array.BinaryDictionaryBuilder)
	defer b.Release()
	for range rows {
		if r.IntN(5) == 0 {
			b.AppendNull()
		} else if err := b.AppendString(randomText(r)); err != nil {
			panic(err)
		}
	}
	return b.NewArray()
}
