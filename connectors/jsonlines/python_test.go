package jsonlines

import (
	"bytes"
	"encoding/json"
	"errors"
	"fmt"
	"math"
	"math/rand/v2"
	"os"
	"path/filepath"
	"reflect"
	"strconv"
	"testing"
	"time"

	"github.com/apache/arrow/go/v16/arrow"
	"github.com/apache/arrow/go/v16/arrow/array"
	"github.com/apache/arrow/go/v16/arrow/decimal128"
	"github.com/apache/arrow/go/v16/arrow/memory"

	"labelweir/connectors/table"
)

// The reference is Python's json module, which writes the files.
func TestValuesAreThoseThatPythonWrote(t *testing.T) {
	var files map[string][]map[string]json.RawMessage
	if err := json.Unmarshal(python(t, "json", "write.py", t.TempDir()), &files); err != nil {
		t.Fatal(err)
	}
	if len(files) != 4 {
		t.Errorf("%d files", len(files))
	}
	for path, want := range files {
		types, rows, err := content(t, string(must(os.ReadFile(path))), options(t))
		if err != nil {
			t.Fatal(err)
		}
		names := []string{"id", "grade", "size", "big", "ripe", "red", "box", "note"}
		wantTypes := []string{"id int64", "grade utf8", "size float64", "big int64", "ripe bool", "red fixed_size_list<item: float64, nullable>[3]", "box struct<>", "note utf8"}
		if !reflect.DeepEqual(types, wantTypes) {
			t.Errorf("%s: got %q, want %q", path, types, wantTypes)
		}
		if len(rows) != len(want) {
			t.Fatalf("%s: %d rows, want %d", path, len(rows), len(want))
		}
		for i, row := range rows {
			for k, got := range row {
				if w := plain(want[i][names[k]]); squeeze(got) != squeeze(w) {
					t.Fatalf("%s: row %d, %s: got %q, want %q", path, i, names[k], got, w)
				}
			}
		}
	}
}

// plain is a JSON value as content shows it.
func plain(b json.RawMessage) string {
	if b == nil || string(b) == "null" {
		return "~"
	}
	var s string
	if json.Unmarshal(b, &s) == nil {
		return s
	}
	return string(b)
}

// squeeze takes blanks out of what is JSON, and makes its numbers shortest.
func squeeze(s string) string {
	var v any
	if s == "" || s[0] != '[' && s[0] != '{' || json.Unmarshal([]byte(s), &v) != nil {
		return s
	}
	return string(must(json.Marshal(v)))
}

// values is a table of values that are hard to write.
func values() arrow.Record {
	r := rand.New(rand.NewPCG(5, 6))
	schema := arrow.NewSchema([]arrow.Field{{Name: "number", Type: arrow.PrimitiveTypes.Float64, Nullable: true}, {Name: "word", Type: arrow.BinaryTypes.String},
		{Name: "whole", Type: arrow.PrimitiveTypes.Int64}, {Name: "moment", Type: &arrow.TimestampType{Unit: arrow.Microsecond, TimeZone: "UTC"}},
		{Name: "price", Type: &arrow.Decimal128Type{Precision: 38, Scale: 4}}, {Name: "list", Type: arrow.ListOf(arrow.PrimitiveTypes.Int32)}}, nil)
	b := array.NewRecordBuilder(memory.DefaultAllocator, schema)
	for i := range 2000 {
		v := r.NormFloat64() * math.Pow(10, float64(r.IntN(600)-300)) // pandas refuses the smallest numbers of all
		switch i % 5 {
		case 0:
			v = math.Round(r.NormFloat64()*1e4) / 1e3
		case 1:
			v = []float64{math.NaN(), math.Inf(1), math.Inf(-1)}[r.IntN(3)]
		}
		b.Field(0).(*array.Float64Builder).Append(v)
		word := make([]rune, r.IntN(8))
		for k := range word {
			word[k] = []rune("ab\"\\\n\x01ä\U0001f34e\u2028/")[r.IntN(10)]
		}
		b.Field(1).(*array.StringBuilder).Append("x" + string(word))
		b.Field(2).(*array.Int64Builder).Append(r.Int64() - math.MaxInt64/2)
		b.Field(3).(*array.TimestampBuilder).Append(arrow.Timestamp(r.Int64N(4e15) - 2e15))
		b.Field(4).(*array.Decimal128Builder).Append(decimal128.FromI64(r.Int64N(1e12) - 5e11))
		b.Field(5).(*array.ListBuilder).Append(true)
		for range r.IntN(3) {
			b.Field(5).(*array.ListBuilder).ValueBuilder().(*array.Int32Builder).Append(r.Int32())
		}
	}
	return b.NewRecord()
}

// The references are Python's json module and pandas, which read what the writer wrote.
func TestPythonAndPandasReadWhatIsWritten(t *testing.T) {
	rec := values()
	var out bytes.Buffer
	w := must(create(&out, rec.Schema(), table.WriteOptions{Memory: memory.DefaultAllocator}))
	if err := errors.Join(w.Write(rec), w.Close()); err != nil {
		t.Fatal(err)
	}
	path := filepath.Join(t.TempDir(), "out.jsonl")
	if err := os.WriteFile(path, out.Bytes(), 0o600); err != nil {
		t.Fatal(err)
	}
	var got struct {
		Rows  [][]any
		Types map[string]string
		Words []string
	}
	if err := json.Unmarshal(python(t, "pandas", "read.py", path), &got); err != nil {
		t.Fatal(err)
	}
	if len(got.Rows) != int(rec.NumRows()) {
		t.Fatalf("%d rows", len(got.Rows))
	}
	for i, row := range got.Rows {
		number := rec.Column(0).(*array.Float64).Value(i)
		if hex, ok := row[0].(string); ok == (math.IsNaN(number) || math.IsInf(number, 0)) || ok && must(strconv.ParseFloat(hex, 64)) != number {
			t.Fatalf("row %d: got %v, want %v", i, row[0], number)
		}
		word, whole := rec.Column(1).(*array.String).Value(i), strconv.FormatInt(rec.Column(2).(*array.Int64).Value(i), 10)
		if row[1] != word || got.Words[i] != word || row[2] != whole {
			t.Fatalf("row %d: got %q, %q and %s, want %q and %s", i, row[1], got.Words[i], row[2], word, whole)
		}
		moment := time.UnixMicro(int64(rec.Column(3).(*array.Timestamp).Value(i)))
		if back, err := time.Parse(time.RFC3339, row[3].(string)); err != nil || !back.Equal(moment) {
			t.Fatalf("row %d: got %s, want %s", i, row[3], moment)
		}
		price := rec.Column(4).(*array.Decimal128).Value(i).ToFloat64(4)
		if p, ok := row[4].(float64); !ok || math.Abs(p-price) > 1e-9*math.Abs(price) {
			t.Fatalf("row %d: got %v, want %v", i, row[4], price)
		}
		if list := fmt.Sprint(rec.Column(5).(*array.List).ValueStr(i)); squeeze(list) != squeeze(string(must(json.Marshal(row[5])))) {
			t.Fatalf("row %d: got %v, want %s", i, row[5], list)
		}
	}
	if got.Types["number"] != "float64" || got.Types["whole"] != "int64" {
		t.Errorf("pandas infers %v", got.Types)
	}
}
