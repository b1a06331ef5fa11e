package table

import (
	"math"

	"github.com/apache/arrow/go/v16/arrow"
	"github.com/apache/arrow/go/v16/arrow/array"
	"github.com/apache/arrow/go/v16/arrow/memory"

	"labelweir/filter"
	"labelweir/model"
)

func tagFields() []arrow.Field {
	dict := &arrow.DictionaryType{IndexType: arrow.PrimitiveTypes.Int8, ValueType: arrow.BinaryTypes.String}
	types := []arrow.DataType{arrow.PrimitiveTypes.Float64, dict, arrow.BinaryTypes.String, arrow.PrimitiveTypes.Float64, dict, arrow.BinaryTypes.String}
	fields := make([]arrow.Field, len(types))
	for i, name := range TagNames() {
		fields[i] = arrow.Field{Name: name, Type: types[i], Nullable: name != "weir_verdict"}
	}
	return fields
}

// tagColumns collects tags and makes columns of them.
type tagColumns struct {
	score, margin     *array.Float64Builder
	verdict, reason   *array.Int8Builder
	implied, snapshot *tagText

	verdicts, reasons arrow.Array // the dictionaries
}

func newTagColumns(mem memory.Allocator) *tagColumns {
	t := &tagColumns{
		score: array.NewFloat64Builder(mem), margin: array.NewFloat64Builder(mem),
		verdict: array.NewInt8Builder(mem), reason: array.NewInt8Builder(mem),
		implied: &tagText{mem: mem}, snapshot: &tagText{mem: mem},
	}
	var names []string
	for v := filter.Pass; v <= filter.Unscored; v++ {
		names = append(names, v.String())
	}
	t.verdicts = dictionaryOf(mem, names)
	names = nil
	for r := model.NoLabel; r <= model.InputsChanged; r++ {
		names = append(names, r.String())
	}
	t.reasons = dictionaryOf(mem, names)
	return t
}

func dictionaryOf(mem memory.Allocator, names []string) arrow.Array {
	b := array.NewStringBuilder(mem)
	defer b.Release()
	b.AppendValues(names, nil)
	return b.NewArray()
}

// reserve makes room for more rows.
func (t *tagColumns) reserve(n int) {
	for _, b := range []array.Builder{t.score, t.margin, t.verdict, t.reason} {
		b.Reserve(n)
	}
	t.implied.reserve(n)
	t.snapshot.reserve(n)
}

// add appends one row, for which there must be room.
func (t *tagColumns) add(tag *filter.Tag) {
	number(t.score, tag.Score)
	number(t.margin, tag.Margin)
	t.verdict.UnsafeAppend(int8(tag.Verdict))
	t.implied.add(tag.Implied, tag.Verdict != filter.Unscored)
	t.snapshot.add(tag.Snapshot, tag.Snapshot != "")
	if tag.Reason == model.Scored {
		t.reason.UnsafeAppendBoolToBitmap(false)
	} else {
		t.reason.UnsafeAppend(int8(tag.Reason - model.NoLabel))
	}
}

func number(b *array.Float64Builder, v float64) {
	if math.IsNaN(v) {
		b.UnsafeAppendBoolToBitmap(false)
	} else {
		b.UnsafeAppend(v)
	}
}

// take gives the columns of the rows added since the last take; the caller releases them.
func (t *tagColumns) take() []arrow.Array {
	return []arrow.Array{
		t.score.NewArray(), indexed(t.verdict, t.verdicts), t.implied.take(),
		t.margin.NewArray(), indexed(t.reason, t.reasons), t.snapshot.take(),
	}
}

func indexed(b *array.Int8Builder, dict arrow.Array) arrow.Array {
	codes := b.NewArray()
	defer codes.Release()
	return array.NewDictionaryArray(&arrow.DictionaryType{IndexType: arrow.PrimitiveTypes.Int8, ValueType: arrow.BinaryTypes.String}, codes, dict)
}

func (t *tagColumns) release() {
	for _, x := range []interface{ Release() }{t.score, t.margin, t.verdict, t.reason, t.verdicts, t.reasons} {
		x.Release()
	}
	t.implied.release()
	t.snapshot.release()
}
