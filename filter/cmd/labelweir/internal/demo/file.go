package demo

import (
	"fmt"
	"io"
	"math"
	"os"

	"github.com/apache/arrow/go/v16/arrow"
	"github.com/apache/arrow/go/v16/arrow/array"
	"github.com/apache/arrow/go/v16/arrow/ipc"
	"github.com/apache/arrow/go/v16/arrow/memory"
)

// batchRows is the length of the record batches of the files written here.
const batchRows = 4096

// words is a column of names stored once each.
func words() arrow.DataType {
	return &arrow.DictionaryType{IndexType: arrow.PrimitiveTypes.Int8, ValueType: arrow.BinaryTypes.String}
}

// lineSchema is what the line records of every apple.
func lineSchema() *arrow.Schema {
	number := arrow.PrimitiveTypes.Float64
	return arrow.NewSchema([]arrow.Field{
		{Name: "apple_id", Type: arrow.PrimitiveTypes.Int64},
		{Name: "graded_at", Type: &arrow.TimestampType{Unit: arrow.Millisecond, TimeZone: "UTC"}},
		{Name: "grader", Type: words()},
		{Name: "cultivar", Type: words(), Nullable: true},
		{Name: "diameter_mm", Type: number},
		{Name: "mass_g", Type: number, Nullable: true},
		{Name: "red_share", Type: number},
		{Name: "brix", Type: number, Nullable: true},
		{Name: "firmness_n", Type: number},
		{Name: "blemish_share", Type: number},
		{Name: "grade", Type: words()},
	}, nil)
}

// plantedSchema is what nobody at the line knows.
func plantedSchema() *arrow.Schema {
	return arrow.NewSchema([]arrow.Field{
		{Name: "apple_id", Type: arrow.PrimitiveTypes.Int64},
		{Name: "true_grade", Type: words()},
		{Name: "planted", Type: arrow.FixedWidthTypes.Boolean},
	}, nil)
}

// WriteLine writes what the line recorded, without the truth, as an Arrow file that must not exist yet.
func (h *Harvest) WriteLine(path string) error {
	return writeFile(path, lineSchema(), h.Rows(), func(b *array.RecordBuilder, i int) error {
		a := h.apples[i]
		stamp, err := arrow.TimestampFromTime(h.at[i], arrow.Millisecond)
		if err != nil {
			return err
		}
		b.Field(0).(*array.Int64Builder).Append(int64(i))
		b.Field(1).(*array.TimestampBuilder).Append(stamp)
		if err := appendWord(b, 2, graders[h.graders[i]].name); err != nil {
			return err
		}
		name := ""
		if a.cultivar >= 0 {
			name = cultivars[a.cultivar].name
		}
		if err := appendWord(b, 3, name); err != nil {
			return err
		}
		for k, x := range []float64{a.diameter, a.mass, a.red, a.brix, a.firmness, a.blemish} {
			column := b.Field(4 + k).(*array.Float64Builder)
			if math.IsNaN(x) {
				column.AppendNull()
			} else {
				column.Append(x)
			}
		}
		return appendWord(b, 10, grades[h.called[i]])
	})
}

// WritePlanted writes the truth about each apple as an Arrow file that must not exist yet.
func (h *Harvest) WritePlanted(path string) error {
	return writeFile(path, plantedSchema(), h.Rows(), func(b *array.RecordBuilder, i int) error {
		b.Field(0).(*array.Int64Builder).Append(int64(i))
		b.Field(2).(*array.BooleanBuilder).Append(h.wrong(i))
		return appendWord(b, 1, grades[h.apples[i].grade])
	})
}

// appendWord puts a name into the dictionary column at index k; "" is missing.
func appendWord(b *array.RecordBuilder, k int, name string) error {
	column := b.Field(k).(*array.BinaryDictionaryBuilder)
	if name == "" {
		column.AppendNull()
		return nil
	}
	return column.AppendString(name)
}

// writeFile writes rows rows, each put into the builder by row.
func writeFile(path string, schema *arrow.Schema, rows int, row func(*array.RecordBuilder, int) error) (err error) {
	file, err := os.OpenFile(path, os.O_WRONLY|os.O_CREATE|os.O_EXCL, 0o666)
	if err != nil {
		return err
	}
	defer func() {
		if closed := file.Close(); err == nil {
			err = closed
		}
		if err != nil {
			os.Remove(path)
		}
	}()
	return write(file, schema, rows, row)
}

func write(out io.WriteSeeker, schema *arrow.Schema, rows int, row func(*array.RecordBuilder, int) error) error {
	builder := array.NewRecordBuilder(memory.DefaultAllocator, schema)
	defer builder.Release()
	w, err := ipc.NewFileWriter(out, ipc.WithSchema(schema))
	if err != nil {
		return err
	}
	for i := range rows {
		if err := row(builder, i); err != nil {
			return fmt.Errorf("row %d: %w", i, err)
		}
		if (i+1)%batchRows != 0 && i+1 != rows {
			continue
		}
		record := builder.NewRecord()
		err := w.Write(record)
		record.Release()
		if err != nil {
			return err
		}
	}
	return w.Close()
}
