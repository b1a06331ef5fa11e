package main

import (
	"errors"
	"fmt"
	"math"
	"os"
	"strconv"
	"strings"

	"github.com/apache/arrow/go/v16/arrow"
	"github.com/apache/arrow/go/v16/arrow/array"
	"github.com/apache/arrow/go/v16/arrow/ipc"
	"github.com/apache/arrow/go/v16/arrow/memory"

	"github.com/rogpeppe/go-internal/testscript"

	"labelweir/filter/cmd/labelweir/internal/demo"
)

// mkarrow writes an Arrow file for a script: mkarrow FILE ROWS NAME=TYPE:PATTERN...
//
// Row i belongs to one of two classes, drawn by a hash; every twentieth label is of the other class. Patterns of numbers:
// good (tells the classes apart), noise, row, flat, null, nan and inf (every fortieth so), and of labels: label, one (a
// single class), rare (two rows of a third class), holes (every tenth missing), null, and who (one of three graders).
func mkarrow(ts *testscript.TestScript, neg bool, args []string) {
	if neg || len(args) < 3 {
		ts.Fatalf("usage: mkarrow FILE ROWS NAME=TYPE:PATTERN...")
	}
	rows, err := strconv.Atoi(args[1])
	ts.Check(err)
	var fields []arrow.Field
	var patterns []string
	for _, a := range args[2:] {
		name, rest, _ := strings.Cut(a, "=")
		kind, pattern, _ := strings.Cut(rest, ":")
		dt, err := typeOf(kind)
		ts.Check(err)
		fields = append(fields, arrow.Field{Name: name, Type: dt, Nullable: true})
		patterns = append(patterns, pattern)
	}
	ts.Check(writeArrow(ts.MkAbs(args[0]), arrow.NewSchema(fields, nil), rows, patterns))
}

// apples writes the demo's packing line: apples FILE ROWS SEED.
func apples(ts *testscript.TestScript, neg bool, args []string) {
	if neg || len(args) != 3 {
		ts.Fatalf("usage: apples FILE ROWS SEED")
	}
	rows, err := strconv.Atoi(args[1])
	ts.Check(err)
	seed, err := strconv.ParseUint(args[2], 10, 64)
	ts.Check(err)
	ts.Check(demo.Grow(rows, seed).WriteLine(ts.MkAbs(args[0])))
}

func typeOf(kind string) (arrow.DataType, error) {
	types := map[string]arrow.DataType{
		"float64": arrow.PrimitiveTypes.Float64, "int64": arrow.PrimitiveTypes.Int64, "bool": arrow.FixedWidthTypes.Boolean,
		"utf8": arrow.BinaryTypes.String, "time": arrow.FixedWidthTypes.Timestamp_s, "list": arrow.ListOf(arrow.PrimitiveTypes.Int64),
		"dict": &arrow.DictionaryType{IndexType: arrow.PrimitiveTypes.Int8, ValueType: arrow.BinaryTypes.String},
	}
	if dt := types[kind]; dt != nil {
		return dt, nil
	}
	return nil, fmt.Errorf("no type %q", kind)
}

func writeArrow(path string, schema *arrow.Schema, rows int, patterns []string) (err error) {
	file, err := os.Create(path)
	if err != nil {
		return err
	}
	defer func() { err = errors.Join(err, file.Close()) }()
	b := array.NewRecordBuilder(memory.DefaultAllocator, schema)
	defer b.Release()
	for i := range rows {
		for k, pattern := range patterns {
			if err := appendValue(b.Field(k), i, pattern); err != nil {
				return err
			}
		}
	}
	record := b.NewRecord()
	defer record.Release()
	w, err := ipc.NewFileWriter(file, ipc.WithSchema(schema))
	if err != nil {
		return err
	}
	if rows > 0 {
		err = w.Write(record)
	}
	return errors.Join(err, w.Close())
}

// hash gives a number in [0, 1) for a row.
func hash(i, salt int) float64 {
	x := uint64(i)*0x9e3779b97f4a7c15 + uint64(salt)*0xbf58476d1ce4e5b9
	x ^= x >> 29
	x *= 0x94d049bb133111eb
	x ^= x >> 32
	return float64(x>>11) / (1 << 53)
}

func trueClass(i int) int {
	if hash(i, 1) < 0.5 {
		return 0
	}
	return 1
}

// class gives the class a label pattern puts row i into, −1 for none.
func class(i int, pattern string) int {
	switch {
	case pattern == "null", pattern == "holes" && i%10 == 3:
		return -1
	case pattern == "one":
		return 0
	case pattern == "rare" && (i == 11 || i == 17):
		return 2
	case i%20 == 7:
		return 1 - trueClass(i)
	}
	return trueClass(i)
}

func number(i int, pattern string) (x float64, ok bool) {
	odd := i%40 == 9
	switch {
	case pattern == "null":
		return 0, false
	case pattern == "flat":
		return 7, true
	case pattern == "row":
		return float64(i), true
	case pattern == "nan" && odd:
		return math.NaN(), true
	case pattern == "inf" && odd:
		return math.Inf(1 - 2*(i/40%2)), true
	case pattern == "noise":
		return hash(i, 2), true
	}
	return 3*float64(trueClass(i)) + hash(i, 3) + hash(i, 4), true
}

func appendValue(b array.Builder, i int, pattern string) error {
	x, ok := number(i, pattern)
	c := class(i, pattern)
	switch b := b.(type) {
	case *array.Float64Builder:
		if !ok {
			b.AppendNull()
			return nil
		}
		b.Append(x)
	case *array.Int64Builder:
		if pattern == "row" {
			b.Append(int64(i))
		} else if c < 0 {
			b.AppendNull()
		} else {
			b.Append(int64(c + 1))
		}
	case *array.BooleanBuilder:
		b.Append(c == 1)
	case *array.TimestampBuilder:
		b.Append(arrow.Timestamp(1_800_000_000 + i))
	case *array.StringBuilder:
		if c < 0 {
			b.AppendNull()
			return nil
		}
		if pattern == "who" {
			b.Append("grader-" + strconv.Itoa(1+int(3*hash(i, 5))))
			return nil
		}
		b.Append("class-" + strconv.Itoa(c+1))
	case *array.BinaryDictionaryBuilder:
		if c < 0 {
			b.AppendNull()
			return nil
		}
		return b.AppendString("class-" + strconv.Itoa(c+1))
	case *array.ListBuilder:
		b.Append(true)
		b.ValueBuilder().(*array.Int64Builder).Append(int64(i))
	default:
		return fmt.Errorf("no values for %T", b)
	}
	return nil
}
