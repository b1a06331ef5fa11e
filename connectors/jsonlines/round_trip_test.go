package jsonlines

import (
	"bytes"
	"encoding/json"
	"errors"
	"math/rand/v2"
	"reflect"
	"strings"
	"testing"

	"github.com/apache/arrow/go/v16/arrow"
	"github.com/apache/arrow/go/v16/arrow/array"
	"github.com/apache/arrow/go/v16/arrow/memory"

	"labelweir/connectors/table"
)

// Whatever a table holds, the reader reads what the writer wrote; written a second time, it is the same bytes.
func TestValuesOfAnyKindComeBack(t *testing.T) {
	r := rand.New(rand.NewPCG(9, 10))
	vector := arrow.FixedSizeListOf(2, arrow.PrimitiveTypes.Float64)
	schema := arrow.NewSchema([]arrow.Field{{Name: "word", Type: arrow.BinaryTypes.String, Nullable: true},
		{Name: "a \"b\"\\\n", Type: arrow.PrimitiveTypes.Float64, Nullable: true}, {Name: "v", Type: vector, Nullable: true}}, nil)
	for range 2_000 {
		b := array.NewRecordBuilder(memory.DefaultAllocator, schema)
		words, numbers, lists := b.Field(0).(*array.StringBuilder), b.Field(1).(*array.Float64Builder), b.Field(2).(*array.FixedSizeListBuilder)
		items := lists.ValueBuilder().(*array.Float64Builder)
		for row := range 1 + r.IntN(5) {
			word := make([]byte, r.IntN(6))
			for i := range word {
				word[i] = byte(r.IntN(1 + r.IntN(256)))
			}
			words.Append("x" + strings.ToValidUTF8(string(word), "\u2028"))
			numbers.Append(r.NormFloat64())
			lists.Append(true)
			items.AppendValues([]float64{r.NormFloat64(), float64(r.IntN(10))}, nil)
			if row > 0 && r.IntN(3) == 0 {
				words.AppendNull()
				numbers.AppendNull()
				lists.AppendNull()
			}
		}
		rec := b.NewRecord()
		var out bytes.Buffer
		w := must(create(&out, schema, table.WriteOptions{Memory: memory.DefaultAllocator}))
		if err := errors.Join(w.Write(rec), w.Close()); err != nil {
			t.Fatal(err)
		}
		opt := table.ReadOptions{Rows: 2, Peek: 100, MostRow: 1 << 20, Memory: memory.NewGoAllocator()}
		_, got, err := content(t, out.String(), opt)
		var want [][]string
		for i := range int(rec.NumRows()) {
			want = append(want, []string{valueOf(rec.Column(0), i), string(jsonOf(rec.Column(1), i)), valueOf(rec.Column(2), i)})
		}
		if err != nil || !reflect.DeepEqual(got, want) {
			t.Fatalf("%q: got %q %v, want %q", out.String(), got, err, want)
		}
		rd := must(open(file(out.String()), opt))
		var again bytes.Buffer
		w = must(create(&again, rd.Schema(), table.WriteOptions{Memory: memory.DefaultAllocator}))
		if err := errors.Join(each(t, rd, func(rec arrow.Record) {
			if err := w.Write(rec); err != nil {
				t.Fatal(err)
			}
		}), w.Close()); err != nil || !bytes.Equal(again.Bytes(), out.Bytes()) {
			t.Fatalf("got %q %v, want %q", again.Bytes(), err, out.Bytes())
		}
	}
}

// jsonOf is a number as encoding/json writes it, ~ for null; numbers here are neither very large nor very small.
func jsonOf(arr arrow.Array, i int) []byte {
	if arr.IsNull(i) {
		return []byte("~")
	}
	return must(json.Marshal(arr.(*array.Float64).Value(i)))
}
