package csv

import (
	"bytes"
	"errors"
	"math/rand/v2"
	"reflect"
	"testing"

	"github.com/apache/arrow/go/v16/arrow"
	"github.com/apache/arrow/go/v16/arrow/array"
	"github.com/apache/arrow/go/v16/arrow/memory"

	"labelweir/connectors/table"
)

// Whatever text a table holds, and whatever stands between the cells, the reader reads what the writer wrote; what is
// empty comes back as null. Written a second time, it is the same bytes.
func TestTextOfAnyKindComesBack(t *testing.T) {
	const letters = "ab,;|\t\"\r\n 0.\xc3\xa4"
	r := rand.New(rand.NewPCG(9, 10))
	schema := arrow.NewSchema([]arrow.Field{{Name: "first", Type: arrow.BinaryTypes.String, Nullable: true},
		{Name: "second, \"quoted\"", Type: arrow.BinaryTypes.String, Nullable: true}, {Name: "third", Type: arrow.BinaryTypes.String, Nullable: true}}, nil)
	for range 2_000 {
		b := array.NewRecordBuilder(memory.DefaultAllocator, schema)
		var want [][]string
		for range 1 + r.IntN(5) {
			row := make([]string, 3)
			for k := range row {
				word := make([]byte, r.IntN(6))
				for i := range word {
					word[i] = letters[r.IntN(len(letters))]
				}
				if row[k] = string(word); len(word) == 0 {
					row[k] = "~"
				}
				if col := b.Field(k).(*array.StringBuilder); len(word) == 0 && r.IntN(2) == 0 {
					col.AppendNull()
				} else {
					col.Append(string(word))
				}
			}
			want = append(want, row)
		}
		var out bytes.Buffer
		m := manner{delimiter: delimiters[r.IntN(len(delimiters))], newline: []string{"\n", "\r\n"}[r.IntN(2)]}
		w := must(create(&out, schema, table.WriteOptions{Manner: m, Memory: memory.DefaultAllocator}))
		if err := errors.Join(w.Write(b.NewRecord()), w.Close()); err != nil {
			t.Fatal(err)
		}
		opt := table.ReadOptions{Rows: 2, Peek: 1, MostRow: 1 << 20, Memory: memory.NewGoAllocator(), Delimiter: m.delimiter}
		_, got, err := content(t, out.String(), opt)
		if err != nil || !reflect.DeepEqual(got, want) {
			t.Fatalf("%q: got %q %v, want %q", out.String(), got, err, want)
		}
		rd := must(open(file(out.String()), opt))
		var again bytes.Buffer
		w = must(create(&again, rd.Schema(), table.WriteOptions{Manner: rd.(table.Manner).Manner(), Memory: memory.DefaultAllocator}))
		for rec, err := rd.Next(); err == nil; rec, err = rd.Next() {
			if err := w.Write(rec); err != nil {
				t.Fatal(err)
			}
		}
		if err := w.Close(); err != nil || !bytes.Equal(again.Bytes(), out.Bytes()) {
			t.Fatalf("got %q %v, want %q", again.Bytes(), err, out.Bytes())
		}
	}
}
