package arrowfile

import (
	"context"
	"encoding/binary"
	"errors"
	"fmt"
	"math/bits"
	"os"
	"path/filepath"
	"strings"
	"testing"

	"github.com/apache/arrow/go/v16/arrow"
	"github.com/apache/arrow/go/v16/arrow/array"
	"github.com/apache/arrow/go/v16/arrow/endian"
	"github.com/apache/arrow/go/v16/arrow/ipc"
	"github.com/apache/arrow/go/v16/arrow/memory"

	"labelweir/connectors/table"
	"labelweir/filter"
	"labelweir/model"
)

func TestIdentifiersAndFreeTextAreLeftOut(t *testing.T) {
	n := 60
	ints := func(f func(int) int64) arrow.Array {
		b := array.NewInt64Builder(memory.DefaultAllocator)
		for i := range n {
			b.Append(f(i))
		}
		return b.NewArray()
	}
	text := func(f func(int) string) arrow.Array {
		b := array.NewStringBuilder(memory.DefaultAllocator)
		for i := range n {
			b.Append(f(i))
		}
		return b.NewArray()
	}
	bytes := array.NewBinaryBuilder(memory.DefaultAllocator, arrow.BinaryTypes.Binary)
	for range n {
		bytes.Append([]byte{0xFF, 0xFE})
	}
	cols := []struct {
		name string
		arr  arrow.Array
		used model.Kind
	}{
		{"grade", text(func(i int) string { return "abc"[i%3 : i%3+1] }), 0},
		{"batch_id", ints(func(i int) int64 { return int64(i*7919) % 1000 }), 0},
		{"bin_id", ints(func(i int) int64 { return int64(i % 12) }), model.Number}, // few values, so it may mean something
		{"counter", ints(func(i int) int64 { return int64(i) + 5 }), 0},
		{"weight", ints(func(i int) int64 { return int64(i*7919) % 1000 }), model.Number},
		{"remark", text(func(i int) string { return fmt.Sprint("apple ", i) }), 0},
		{"stand", text(func(i int) string { return fmt.Sprint("row ", i/4) }), model.Category},
		{"blob", bytes.NewArray(), 0},
		{"weir_margin", ints(func(i int) int64 { return int64(i % 5) }), 0},
		{"weir_height", ints(func(i int) int64 { return int64(i % 5) }), model.Number},
		{"void", array.MakeArrayOfNull(memory.DefaultAllocator, arrow.PrimitiveTypes.Float64, n), model.Number},
	}
	var fields []arrow.Field
	var arrs []arrow.Array
	for _, c := range cols {
		fields, arrs = append(fields, arrow.Field{Name: c.name, Type: c.arr.DataType(), Nullable: true}), append(arrs, c.arr)
	}
	schema := arrow.NewSchema(fields, nil)
	path := filepath.Join(t.TempDir(), "in.arrows")
	f := must(os.Create(path))
	w := ipc.NewWriter(f, ipc.WithSchema(schema))
	if err := errors.Join(w.Write(array.NewRecord(schema, arrs, int64(n))), w.Close(), f.Close()); err != nil {
		t.Fatal(err)
	}
	src := open(t, path, filter.Record{Label: "grade"}, counted(t))
	for i, c := range src.Choice() {
		if c.Kind != cols[i].used || c.Used != (c.Kind != 0) {
			t.Errorf("%s: got %+v, want %v", c.Column, c, cols[i].used)
		}
		if !c.Used && c.Why == "" || c.Column == "void" && c.Why == "" {
			t.Errorf("%s: no reason is given", c.Column)
		}
	}
	err := readWhole(path, filter.Record{Label: "grade", Fields: []filter.Field{{Path: "blob", Kind: model.Category}}}, counted(t))
	if !errors.Is(err, table.ErrUnreadable) || !strings.Contains(err.Error(), "not UTF-8") {
		t.Errorf("bytes as category: got %v", err)
	}
}

// Neither arrow/go nor pyarrow writes the other byte order, so the values are swapped by hand before writing.
func TestTheOtherByteOrderIsRead(t *testing.T) {
	x := array.NewInt32Builder(memory.DefaultAllocator)
	for _, v := range []int32{1, -2, 300} {
		x.Append(int32(bits.ReverseBytes32(uint32(v))))
	}
	offsets, err := memory.NewBufferBytes(nil), error(nil)
	for _, o := range []uint32{0, 1, 3, 4} {
		offsets = memory.NewBufferBytes(binary.BigEndian.AppendUint32(offsets.Bytes(), o))
	}
	// The type says bytes of width 4, for arrow/go would look into offsets of text in its own order.
	label := array.NewFixedSizeBinaryBuilder(memory.DefaultAllocator, &arrow.FixedSizeBinaryType{ByteWidth: 1})
	label.AppendValues([][]byte{[]byte("a"), []byte("b"), []byte("a")}, nil)
	schema := arrow.NewSchema([]arrow.Field{{Name: "x", Type: arrow.PrimitiveTypes.Int32}, {Name: "label", Type: label.Type()}}, nil).
		WithEndianness(map[endian.Endianness]endian.Endianness{endian.LittleEndian: endian.BigEndian, endian.BigEndian: endian.LittleEndian}[endian.NativeEndian])
	path := filepath.Join(t.TempDir(), "other.arrows")
	f := must(os.Create(path))
	w := ipc.NewWriter(f, ipc.WithSchema(schema))
	if err = errors.Join(w.Write(array.NewRecord(schema, []arrow.Array{x.NewArray(), label.NewArray()}, 3)), w.Close(), f.Close()); err != nil {
		t.Fatal(err)
	}
	out := outIn(t, ".arrows")
	copyFile(t, open(t, path, filter.Record{Label: "label"}, counted(t)), out, counted(t), func(int64) filter.Tag { return filter.Tag{} })
	for _, p := range []string{path, out.Tagged} {
		src := open(t, p, filter.Record{Label: "label"}, counted(t))
		b := must(src.Next(context.Background()))
		if got := fmt.Sprint(b.Table.Columns[0].Values, b.Table.Classes); got != "[1 -2 300] [a b]" {
			t.Errorf("%s: got %s", p, got)
		}
		b.Release()
	}
}

func TestADictionaryChangingByAHairIsRefused(t *testing.T) {
	dt := &arrow.DictionaryType{IndexType: arrow.PrimitiveTypes.Int8, ValueType: arrow.PrimitiveTypes.Float64}
	schema := arrow.NewSchema([]arrow.Field{{Name: "x", Type: dt}, {Name: "label", Type: arrow.BinaryTypes.String}}, nil)
	path := filepath.Join(t.TempDir(), "hair.arrows")
	f := must(os.Create(path))
	var err error
	for _, v := range []float64{0.5, 0.5000001} {
		dict, codes, label := array.NewFloat64Builder(memory.DefaultAllocator), array.NewInt8Builder(memory.DefaultAllocator), array.NewStringBuilder(memory.DefaultAllocator)
		dict.Append(v)
		codes.Append(0)
		label.Append("a")
		w := ipc.NewWriter(f, ipc.WithSchema(schema)) // a new one each time, for one alone would lose the change
		rec := array.NewRecord(schema, []arrow.Array{array.NewDictionaryArray(dt, codes.NewArray(), dict.NewArray()), label.NewArray()}, 1)
		if v != 0.5 {
			err = f.Close()
			first := must(os.ReadFile(path))
			f = must(os.Create(path))
			w = ipc.NewWriter(f, ipc.WithSchema(schema))
			err = errors.Join(err, w.Write(rec), f.Close())
			second := must(os.ReadFile(path))
			n := 8 + int(binary.LittleEndian.Uint32(second[4:])) // its schema is there already
			err = errors.Join(err, os.WriteFile(path, append(first, second[n:]...), 0o644))
		} else {
			err = w.Write(rec)
		}
		if err != nil {
			t.Fatal(err)
		}
	}
	src := open(t, path, filter.Record{Label: "label"}, counted(t))
	sink := must(create(lazy{}, outIn(t, ".arrows"), src, counted(t)))
	defer sink.Close()
	var got []float64
	each(t, src, func(b *filter.Batch) {
		got = append(got, b.Table.Columns[0].Values...)
		err = errors.Join(err, sink.Deliver(context.Background(), b, make([]filter.Tag, 1)))
	})
	err = errors.Join(err, sink.Commit(context.Background()))
	if fmt.Sprint(got) != "[0.5 0.5000001]" {
		t.Errorf("got values %v", got)
	}
	if !errors.Is(err, table.ErrWrite) || !errors.Is(err, errBlurredDictionary) {
		t.Errorf("got %v", err)
	}
}
